import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { runsOf, trace, tracePath, widen } from '../../src/draw/strip-columns.ts';
import { STRIP_COLUMNS, stripSheet, type StripSheet } from '../../src/draw/strip-sheet.ts';
import { timeText, timeTicks } from '../../src/draw/time-axis.ts';

const asIs = (value: number): number => value;

function pointsOf(d: string): readonly (readonly [number, number])[] {
  return [...d.matchAll(/[ML]([-\d.]+) ([-\d.]+)/g)].map(([, x, y]) => [Number(x), Number(y)]);
}

describe('A trace', () => {
  it('keeps the least and the greatest value of each column, and nothing of a column without one', () => {
    const one = trace(3, 2);
    for (const value of [2, -1, 1]) widen(one, 1, value);
    expect(Array.from(one.least)).toEqual([Number.NaN, -1, Number.NaN]);
    expect(Array.from(one.most)).toEqual([Number.NaN, 2, Number.NaN]);
  });

  it('is drawn up and down in a column, entering at the end that is nearer', () => {
    const one = trace(3, 2);
    for (const [column, value] of [
      [0, 10],
      [1, 9],
      [1, 1],
      [2, 2],
    ] as const)
      widen(one, column, value);
    expect(tracePath(one, asIs, asIs)).toBe('M0 10L1 9L1 1L2 2');
  });

  it('is broken where its columns are too far apart', () => {
    const one = trace(9, 3);
    for (const column of [0, 2, 5, 6]) widen(one, column, 4);
    expect(tracePath(one, asIs, asIs)).toBe('M0 4L2 4M5 4L6 4');
  });

  it('passes every value by no more than paper shows, with far fewer points where it is smooth', () => {
    const value = fc.double({ min: -5, max: 5, noNaN: true });
    fc.assert(
      fc.property(fc.array(value, { minLength: 2, maxLength: 60 }), (values) => {
        const one = trace(values.length, 2);
        values.forEach((each, column) => widen(one, column, each));
        const points = pointsOf(tracePath(one, asIs, asIs));
        values.forEach((each, column) => {
          const after = points.findIndex(([x]) => x >= column);
          const [b, a] = [points[after], points[Math.max(0, after - 1)]];
          if (a === undefined || b === undefined) throw new Error(`nothing is drawn at ${column}`);
          const on = b[0] === a[0] ? b[1] : a[1] + ((column - a[0]) / (b[0] - a[0])) * (b[1] - a[1]);
          // 0.03 mm, and the rounding of path data to a hundredth.
          expect(Math.abs(on - each)).toBeLessThan(0.03 + 0.011);
        });
      }),
    );
    const sine = trace(STRIP_COLUMNS, 2);
    for (let column = 0; column < STRIP_COLUMNS; column++) widen(sine, column, 5 * Math.sin(column / 100));
    expect(pointsOf(tracePath(sine, asIs, asIs)).length).toBeLessThan(STRIP_COLUMNS / 8);
  });

  it('of one value is a dot, and of none nothing', () => {
    const one = trace(5, 2);
    expect(tracePath(one, asIs, asIs)).toBe('');
    widen(one, 3, 1);
    expect(tracePath(one, asIs, asIs)).toBe('M3 1L3 1');
  });
});

describe('Stretches of columns', () => {
  it('are one where they flicker by less than three columns', () => {
    const columns = Uint8Array.of(0, 1, 1, 0, 0, 1, 0, 0, 0, 3, 2);
    expect(runsOf(columns, 1)).toEqual([
      { from: 1, to: 6 },
      { from: 9, to: 10 },
    ]);
    expect(runsOf(columns, 2)).toEqual([{ from: 9, to: 11 }]);
    expect(runsOf(columns, 4)).toEqual([]);
  });
});

describe('A time axis', () => {
  it.each([
    [0, [0]],
    [1, [0, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1]],
    [20.02, [0, 2, 4, 6, 8, 10, 12, 14, 16, 18, 20]],
    [400, [0, 60, 120, 180, 240, 300, 360]],
    [36_000, [0, 3_600, 7_200, 10_800, 14_400, 18_000, 21_600, 25_200, 28_800, 32_400, 36_000]],
  ])('of %d s has round instants', (durationS, ticks) => {
    expect(timeTicks(durationS).map((s) => Number(s.toFixed(9)))).toEqual(ticks);
  });

  it('has thirteen instants at most, however long it is', () => {
    fc.assert(
      fc.property(fc.double({ min: 0, max: 1e9, noNaN: true }), (durationS) => {
        const ticks = timeTicks(durationS);
        expect(ticks.length).toBeLessThanOrEqual(13);
        expect(ticks.at(-1)).toBeLessThanOrEqual(durationS + 1e-6);
      }),
    );
  });

  it.each([
    [0, '0 s'],
    [0.30000000000000004, '0.3 s'],
    [90, '1:30'],
    [7_500, '2:05:00'],
  ])('writes %d as %s', (s, text) => {
    expect(timeText(s)).toBe(text);
  });
});

function sheet(over: Partial<StripSheet> = {}): StripSheet {
  const angle = trace(STRIP_COLUMNS, 10);
  const target = trace(STRIP_COLUMNS, 10);
  for (let column = 0; column < STRIP_COLUMNS; column += 5) {
    widen(angle, column, 20 * Math.sin(column / 90));
    widen(target, column, 30 * Math.sin(column / 90));
  }
  const shaded = [
    { from: 100, to: 260, shade: 'limited', word: 'speed' },
    { from: 400, to: 410, shade: 'clipped', word: 'reach' },
  ] as const;
  return {
    title: 'a < b & "c"',
    subtitle: 'recorded',
    durationS: 20,
    marks: [{ name: 'bow', atS: 10 }],
    groups: [
      { title: 'leader', lane: null, strips: [{ title: 'base', range: null, target: null, angle, shaded: [] }] },
      {
        title: 'wren',
        lane: [{ from: 0, to: STRIP_COLUMNS, word: 'following' }],
        strips: [{ title: 'base', range: [-40, 40], target, angle, shaded }],
      },
    ],
    ...over,
  };
}

describe('A sheet of strips', () => {
  it('is one document, escapes what it is told, and has no number that is none', () => {
    const svg = stripSheet(sheet());
    expect(svg).toMatch(/^<svg [^]*<\/svg>\n$/);
    expect(svg).toContain('a &#60; b &#38; &#34;c&#34;');
    expect(svg).not.toMatch(/NaN|Infinity|undefined/);
  });

  it('says what it shades, by hatching and by words where there is room', () => {
    const svg = stripSheet(sheet());
    expect(svg).toContain('fill="url(#limited)"');
    expect(svg).toContain('>speed</text>');
    expect(svg).toContain('fill="url(#clipped)"');
    // Ten columns are 2 mm.
    expect(svg).not.toContain('>reach<');
    for (const word of ['asked for', 'commanded', 'clipped by its range or reach', 'held back by a limit'])
      expect(svg).toContain(`>${word}</text>`);
  });

  it('puts a mark where its time is: half way along 240 mm that begin at 44', () => {
    expect(stripSheet(sheet())).toMatch(/<line x1="164" y1="[\d.]+" x2="164" [^>]*stroke="#009E73"/);
  });

  it('stays bounded with more marks than it has columns, and lets no two names overlap', () => {
    const marks = Array.from({ length: 20_000 }, (_, i) => ({ name: `mark ${i}`, atS: i / 1000 }));
    const svg = stripSheet(sheet({ marks }));
    expect(svg.length).toBeLessThan(400_000);
    const names = [...svg.matchAll(/<text x="([\d.]+)" y="([\d.]+)"[^>]*fill="#009E73"[^>]*>([^<]*)</g)];
    expect(names.length).toBeGreaterThan(10);
    const rows = new Map<string, number>();
    for (const [, x, y, name] of names) {
      expect(Number(x)).toBeGreaterThanOrEqual(rows.get(y ?? '') ?? 0);
      rows.set(y ?? '', Number(x) + (name?.length ?? 0) * 1.2);
    }
  });

  it.each([
    ['nothing', sheet({ groups: [], marks: [], durationS: 0 })],
    [
      'joints that never had an angle',
      sheet({
        groups: [
          {
            title: 'x'.repeat(300),
            lane: [],
            strips: [{ title: 'y'.repeat(300), range: null, target: null, angle: trace(STRIP_COLUMNS, 2), shaded: [] }],
          },
        ],
      }),
    ],
    ['a mark at the very end', sheet({ marks: [{ name: 'the last bow of the evening', atS: 20 }] })],
  ])('of %s is drawn all the same', (_, what) => {
    const svg = stripSheet(what);
    expect(svg).toMatch(/<\/svg>\n$/);
    expect(svg).not.toMatch(/NaN|Infinity|undefined/);
  });
});
