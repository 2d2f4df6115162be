import fc from 'fast-check';

/** Widths and heights of one segment differ at most a hundredfold from the next one's: measured points do not more. */
const piece = fc.double({ min: 0.01, max: 1, noNaN: true });

/** Points of a map: two to eight, rising in x, rising or falling in y, anywhere and of any scale. */
export const mapPoints: fc.Arbitrary<[number, number][]> = fc
  .record({
    pieces: fc.array(fc.tuple(piece, piece), { minLength: 1, maxLength: 7 }),
    falling: fc.boolean(),
    from: fc.tuple(fc.double({ min: -1e3, max: 1e3, noNaN: true }), fc.double({ min: -1e3, max: 1e3, noNaN: true })),
    scale: fc.tuple(fc.double({ min: 0.01, max: 1e3, noNaN: true }), fc.double({ min: 0.01, max: 1e3, noNaN: true })),
  })
  .map(({ pieces, falling, from, scale }) => {
    let [x, y] = from;
    const points: [number, number][] = [[x, y]];
    for (const [width, height] of pieces) {
      x += width * scale[0];
      y += height * scale[1] * (falling ? -1 : 1);
      points.push([x, y]);
    }
    return points;
  });
