import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { passesBy, staysOut } from '../../src/arm/box.ts';
import { chain } from '../../src/arm/chain.ts';
import { keepOuts } from '../../src/arm/keep-outs.ts';
import type { KeepOut, Vec3 } from '../../src/arm/spec.ts';
import { arm, DEG, finite, link, Y } from './arms.ts';

type Box = Extract<KeepOut, { kind: 'box' }>;

const BOX: Box = { kind: 'box', minM: [0.2, -0.1, 0], maxM: [0.4, 0.1, 0.3] };

/** Clearance of one straight link of 0.5 m that leans forward from a height. */
function clearance(places: readonly KeepOut[], heightM: number, leanDeg: number): number {
  const poser = chain(arm([link(0, Y, [0, 0, 0.5])], { heightM }));
  poser.pose(Float64Array.of(leanDeg * DEG));
  const out = new Float64Array(1);
  keepOuts(places).clearance(poser, out);
  return out[0] as number;
}

describe('clearance', () => {
  it('of a floor is the lowest link end’s height above it, and minus the depth below it', () => {
    const floor: KeepOut = { kind: 'below', zM: 0.1 };
    // By hand: 0.6 high, leaning over by 120 degrees: 0.6 - 0.25 - 0.1; from 0.2: 0.2 - 0.25 - 0.1.
    expect(clearance([floor], 0.6, 120)).toBeCloseTo(0.25, 12);
    expect(clearance([floor], 0.2, 120)).toBeCloseTo(-0.15, 12);
  });

  it('does not count the first axis of an arm that stands on the floor', () => {
    expect(clearance([{ kind: 'below', zM: 0 }], 0, 0)).toBeCloseTo(0.5, 12);
  });

  it('of a box is the distance to the nearest place of a link', () => {
    // By hand: upright at x = 0, the box begins at x = 0.2; lying at a height of 0.45 it is 0.15 above its top.
    expect(clearance([BOX], 0, 0)).toBeCloseTo(0.2, 6);
    expect(clearance([BOX], 0.45, 90)).toBeCloseTo(0.15, 6);
    // Leaning by 45 degrees from 0.2 it passes over the corner (0.2, 0.3): at x = 0.2 it is at 0.4, 0.1 above: 0.1 cos 45.
    expect(clearance([BOX], 0.2, 45)).toBeCloseTo(0.1 * Math.SQRT1_2, 6);
  });

  it('inside a box is minus how far the box must shrink to free the link', () => {
    // By hand: lying at a height of 0.25 it is 0.05 below the top, and must go 0.05 deeper than any side else.
    expect(clearance([BOX], 0.25, 90)).toBeCloseTo(-0.05, 4);
    // In the middle of a box of 0.2 by 0.2 by 0.3 nothing is deeper than 0.1.
    expect(clearance([BOX], 0.15, 90)).toBeCloseTo(-0.1, 4);
  });

  it('is that of the nearest, and infinite where there is none', () => {
    expect(clearance([BOX, { kind: 'below', zM: -1 }], 0.45, 90)).toBeCloseTo(0.15, 6);
    expect(clearance([], 0.45, 90)).toBe(Number.POSITIVE_INFINITY);
  });
});

const place: fc.Arbitrary<Vec3> = fc.tuple(finite(-1, 1), finite(-1, 1), finite(-1, 1));
const box: fc.Arbitrary<Box> = fc
  .tuple(place, fc.tuple(finite(0.05, 1), finite(0.05, 1), finite(0.05, 1)))
  .map(([minM, [dx, dy, dz]]) => ({ kind: 'box', minM, maxM: [minM[0] + dx, minM[1] + dy, minM[2] + dz] }));

const lineOf = (a: Vec3, b: Vec3): Float64Array => Float64Array.of(...a, ...b);
const blend = (a: Float64Array, b: Float64Array, share: number): Float64Array =>
  a.map((value, k) => value + share * ((b[k] as number) - value));

/** True where a point of a line, looked at in many places, is inside a box by more than a little. */
function touches(line: Float64Array, { minM, maxM }: Box): boolean {
  for (let k = 0; k <= 64; k++) {
    const inside = [0, 1, 2].every((i) => {
      const value = (line[i] as number) + (k / 64) * ((line[3 + i] as number) - (line[i] as number));
      return value > (minM[i] as number) + 1e-9 && value < (maxM[i] as number) - 1e-9;
    });
    if (inside) return true;
  }
  return false;
}

/** No bulge at any link end. */
const STRAIGHT = new Float64Array(2);

describe('a link on its way between two looks', () => {
  it('is told to stay out only where it does, for any box and any straight motion', () => {
    let told = 0;
    fc.assert(
      fc.property(box, place, place, place, place, (one, a0, a1, b0, b1) => {
        const [before, after] = [lineOf(a0, a1), lineOf(b0, b1)];
        if (!passesBy(before, after, 0, one, STRAIGHT)) return;
        told++;
        for (let k = 0; k <= 16; k++) expect(touches(blend(before, after, k / 16), one)).toBe(false);
      }),
      { numRuns: 1000 },
    );
    expect(told).toBeGreaterThan(100);
  });

  it('is told to stay out where it stands still outside, whichever way it lies past the box', () => {
    fc.assert(
      fc.property(box, place, place, (one, a, b) => {
        const line = lineOf(a, b);
        const grown: Box = {
          kind: 'box',
          minM: one.minM.map((v) => v - 0.02) as unknown as Vec3,
          maxM: one.maxM.map((v) => v + 0.02) as unknown as Vec3,
        };
        // Looked at in 65 places a line may still cut a corner: clear of a box a little larger it is surely outside.
        fc.pre(!touches(line, grown));
        expect(passesBy(line, line, 0, one, STRAIGHT)).toBe(true);
      }),
      { numRuns: 500 },
    );
  });

  it('stays out with a bulge just when the lowest place of the bulged way does', () => {
    fc.assert(
      fc.property(finite(0, 1), finite(0, 1), finite(0, 1), (a, b, bulge) => {
        let lowest = Number.POSITIVE_INFINITY;
        for (let k = 0; k <= 1000; k++) {
          const r = k / 1000;
          lowest = Math.min(lowest, a * (1 - r) + b * r - 4 * bulge * r * (1 - r));
        }
        // Looked at in 1001 places, the lowest is found to about the bulge over a million.
        fc.pre(Math.abs(lowest) > 1e-5);
        expect(staysOut(Float64Array.of(a, b, bulge))).toBe(lowest > 0);
      }),
    );
  });
});
