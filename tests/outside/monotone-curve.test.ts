import spline from '@yr/monotone-cubic-spline';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { compileMap } from '../../src/map/compile.ts';
import { monotoneSlopes } from '../../src/map/monotone.ts';
import { mapPoints } from '../map/points.ts';

/**
 * RPN 14/15A data: F. N. Fritsch and R. E. Carlson, "Monotone Piecewise Cubic Interpolation", SIAM J. Numer. Anal. 17
 * (1980) 238-246. The third value is 4.37498e-2; copies with e-5 are about.
 */
const RPN: [number, number][] = [
  [7.99, 0],
  [8.09, 2.76429e-5],
  [8.19, 4.37498e-2],
  [8.7, 0.169183],
  [9.2, 0.469428],
  [10, 0.94374],
  [12, 0.998636],
  [15, 0.999919],
  [20, 0.999994],
];

/** Slopes that a second implementation of the same method draws its Bezier handles with. */
function secondOpinion(points: [number, number][]): number[] {
  const [first, second, ...rest] = spline.points(points);
  const [x0 = Number.NaN, y0 = Number.NaN] = first ?? [];
  const [x1 = Number.NaN, y1 = Number.NaN, ...handle] = second ?? [];
  const slopes = [(y1 - y0) / (x1 - x0)];
  for (const [hx = Number.NaN, hy = Number.NaN, x = Number.NaN, y = Number.NaN] of [handle, ...rest])
    slopes.push((y - hy) / (x - hx));
  return slopes;
}

function slopesOf(points: [number, number][]): number[] {
  return [
    ...monotoneSlopes(
      Float64Array.from(points, (p) => p[0]),
      Float64Array.from(points, (p) => p[1]),
    ),
  ];
}

describe('the monotone curve through the RPN 14/15A data', () => {
  it('has the slopes of the published method', () => {
    // Mean secants pulled into the circle of radius 3, Fritsch & Carlson, SIAM J. Numer. Anal. 17 (1980): computed from
    // their data and method, and reproduced by npm @yr/monotone-cubic-spline 1.0.3.
    const published = [
      1.048e-6, 0.000829286, 0.341584511, 0.423218725, 0.59669, 0.082260988, 0.001280706, 0.000044163, 0.00000863863,
    ];
    slopesOf(RPN).forEach((slope, i) => expect(Math.abs(slope - (published[i] as number))).toBeLessThan(1e-6));
  });

  it('has the slopes that npm @yr/monotone-cubic-spline draws', () => {
    const drawn = secondOpinion(RPN);
    expect(drawn).toHaveLength(RPN.length);
    slopesOf(RPN).forEach((slope, i) => expect(Math.abs(slope - (drawn[i] as number))).toBeLessThan(1e-6));
  });

  it('would be told from the curve through the misprinted copy', () => {
    const misprinted = RPN.map(([x, y], i): [number, number] => [x, i === 2 ? 4.37498e-5 : y]);
    expect(Math.abs((slopesOf(misprinted)[2] as number) - (slopesOf(RPN)[2] as number))).toBeGreaterThan(0.05);
  });

  it('rises all the way, where a parabola or a plain cubic would swing', () => {
    const map = compileMap(RPN, 'monotone', 'clamp');
    let least = Number.POSITIVE_INFINITY;
    for (let x = 7.99; x < 20; x += 1e-3) least = Math.min(least, map.value(x + 1e-3) - map.value(x));
    expect(least).toBeGreaterThan(0);
  });
});

/** Moved into the unit square: its handles end so near a steep point that reading them back loses the digits. */
function inUnitSquare(points: [number, number][]): [number, number][] {
  const [x0, y0] = points[0] as [number, number];
  const [x1, y1] = points.at(-1) as [number, number];
  return points.map(([x, y]) => [(x - x0) / (x1 - x0), (y - y0) / Math.abs(y1 - y0)]);
}

describe('the slopes through any points', () => {
  it('are those of npm @yr/monotone-cubic-spline', () => {
    fc.assert(
      fc.property(mapPoints.map(inUnitSquare), (points) => {
        const drawn = secondOpinion(points);
        slopesOf(points).forEach((slope, i) => {
          expect(Math.abs(slope - (drawn[i] as number))).toBeLessThan(1e-6 * (1 + Math.abs(slope)));
        });
      }),
    );
  });
});
