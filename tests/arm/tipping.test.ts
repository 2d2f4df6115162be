import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { dynamics } from '../../src/arm/dynamics.ts';
import { hullEdges } from '../../src/arm/footprint.ts';
import type { MotionBounds } from '../../src/arm/reaction.ts';
import type { ArmSpec, BaseSpec } from '../../src/arm/spec.ts';
import { tipping } from '../../src/arm/tipping.ts';
import { angles, anyArm, arm, DEG, finite, link, Y, Z } from './arms.ts';

const G = 9.80665;
const FEET = [
  [0.2, 0.15],
  [-0.2, 0.15],
  [-0.2, -0.15],
  [0.2, -0.15],
] as const;
const STANDING: Partial<BaseSpec> = { massKg: 3, footprintM: FEET, friction: 0.4 };

/** A column of 0.5 m and a bar of 0.6 m with 0.5 kg at its end. */
const crane = (base: Partial<BaseSpec> = STANDING): ArmSpec =>
  arm([link(0, Z, [0, 0, 0.5]), link(1, Y, [0, 0, 0.6], { massKg: 0.5, centreM: [0, 0, 0.6] })], base);
const still: MotionBounds = { speedRadS: [0, 0], accelRadS2: [0, 0] };
const stands = (spec: ArmSpec, bounds = still) => tipping(spec, bounds) as NonNullable<ReturnType<typeof tipping>>;

describe('a standing arm', () => {
  it('has left, about the edge it would tip over first, the moment of its weight less that of what hangs over', () => {
    // By hand, about the front edge at 0.2: 3 kg hold at 0.2, 0.5 kg at 0.6 tips from 0.4 beyond.
    expect(stands(crane()).staticNm(Float64Array.of(0, 90 * DEG))).toBeCloseTo(G * (3 * 0.2 - 0.5 * 0.4), 9);
    // Turned to the side, about the left edge at 0.15: 3 at 0.15, 0.5 at 0.45 beyond.
    expect(stands(crane()).staticNm(Float64Array.of(90 * DEG, 90 * DEG))).toBeCloseTo(G * (3 * 0.15 - 0.5 * 0.45), 9);
    // Upright: the nearer edge with all 3.5 kg.
    expect(stands(crane()).staticNm(Float64Array.of(0, 0))).toBeCloseTo(G * 3.5 * 0.15, 9);
  });

  it('falls where less than nothing is left, and counts its payload', () => {
    const loaded = { ...crane(), payload: { massKg: 1, atM: [0, 0, 0] as const } };
    expect(stands(loaded).staticNm(Float64Array.of(0, 90 * DEG))).toBeCloseTo(G * (3 * 0.2 - 1.5 * 0.4), 9);
    expect(stands(loaded).staticNm(Float64Array.of(90 * DEG, 90 * DEG))).toBeLessThan(0);
  });

  it('tips over the hull of its feet, in whatever order they are given', () => {
    const star = [
      [0, 0.05],
      [0.2, 0.2],
      [-0.2, 0.2],
      [-0.05, 0],
      [-0.2, -0.2],
      [0.2, -0.2],
    ] as const;
    const spread = [
      [0.2, 0.2],
      [-0.2, 0.2],
      [-0.2, -0.2],
      [0.2, -0.2],
    ] as const;
    const pose = Float64Array.of(0.4, 80 * DEG);
    const tips = (footprintM: BaseSpec['footprintM']): number =>
      stands(crane({ ...STANDING, footprintM })).staticNm(pose);
    expect(tips(star)).toBeCloseTo(tips(spread), 12);
    expect(tips([...spread].reverse())).toBeCloseTo(tips(spread), 12);
  });

  it('stands on nothing where its feet are in one line', () => {
    expect(
      hullEdges([
        [0, 0],
        [1, 1],
        [2, 2],
      ]),
    ).toEqual([]);
    expect(
      stands(
        crane({
          ...STANDING,
          footprintM: [
            [0, 0],
            [1, 0],
            [2, 0],
          ],
        }),
      ).staticNm(Float64Array.of(0, 0)),
    ).toBe(Number.NEGATIVE_INFINITY);
  });

  it('is not told of without a footprint, nor where it hangs or sticks to a wall', () => {
    expect(tipping(crane({}), still)).toBeNull();
    expect(tipping(crane({ ...STANDING, tiltRad: [Math.PI, 0] }), still)).toBeNull();
    expect(tipping(crane({ ...STANDING, tiltRad: [0, Math.PI / 2] }), still)).toBeNull();
    expect(tipping(crane({ ...STANDING, tiltRad: [0.1, 0] }), still)).not.toBeNull();
  });
});

describe('an arm that moves as hard as it may', () => {
  it('has less left: what its accelerating mass pushes back with, and what its turning throws out', () => {
    const pose = Float64Array.of(0, 90 * DEG);
    const accel = { speedRadS: [0, 0], accelRadS2: [0, 4] };
    // By hand: lifted at 4 rad/s^2 the mass at 0.6 m pushes down with 0.5 * 2.4 N, 0.4 m before the edge.
    expect(stands(crane(), accel).movingNm(pose)).toBeCloseTo(G * (3 * 0.2 - 0.5 * 0.4) - 0.5 * 2.4 * 0.4, 9);
    const turning = { speedRadS: [0, 3], accelRadS2: [0, 0] };
    // Turning at 3 rad/s the mass needs 0.5 * 9 * 0.6 N towards the axis, at a height of 0.5: it tips the base forward.
    expect(stands(crane(), turning).movingNm(pose)).toBeCloseTo(G * (3 * 0.2 - 0.5 * 0.4) - 0.5 * 5.4 * 0.5, 9);
  });

  it('counts what two joints that turn at once do together, to either side', () => {
    // By hand: the bar leans by 45 degrees, its mass is 0.4243 m out and 0.9243 m up. Turning at 1 and 3 rad/s it needs
    // 2 * 0.4243 * 1 * 3 m/s^2 sideways: 0.5 kg of that, 0.9243 m up; and 9 * 0.4243 m/s^2 downwards, 0.15 m before the edge.
    const narrow = [
      [9, 0.15],
      [-9, 0.15],
      [-9, -0.15],
      [9, -0.15],
    ] as const;
    const turning = { speedRadS: [1, 3], accelRadS2: [0, 0] };
    const out = 0.6 * Math.SQRT1_2;
    const sideways = 0.5 * 2 * out * 1 * 3 * (0.5 + out);
    const down = 0.5 * 9 * out * 0.15;
    const spec = crane({ ...STANDING, footprintM: narrow });
    expect(stands(spec, turning).movingNm(Float64Array.of(0, 45 * DEG))).toBeCloseTo(
      3.5 * G * 0.15 - sideways - down,
      9,
    );
  });

  it('slides where friction cannot hold what pushes sideways', () => {
    const upright = Float64Array.of(0, 0);
    // By hand: 0.4 of 3.5 kg; upright, 4 rad/s^2 at 0.6 m push sideways with 0.5 * 2.4 N.
    expect(stands(crane()).slidingN(upright)).toBeCloseTo(0.4 * 3.5 * G, 9);
    expect(stands(crane(), { speedRadS: [0, 0], accelRadS2: [0, 4] }).slidingN(upright)).toBeCloseTo(
      0.4 * 3.5 * G - 1.2,
      9,
    );
    expect(stands(crane({ ...STANDING, friction: null })).slidingN(upright)).toBeNaN();
  });

  it('is never worse off than that, whatever its joints do inside their limits, for any arm', () => {
    // The reaction on the base, from the dynamics: one more joint below the first, about an edge of the footprint, feels what
    // tips the arm over that edge.
    const motion = fc.record({ q: angles(8, 3), share: angles(8, 1), speed: angles(8, 1) });
    fc.assert(
      fc.property(anyArm, motion, finite(0.5, 3), finite(1, 10), (some, { q, share, speed }, fast, hard) => {
        const n = some.links.length;
        const spec: ArmSpec = { ...some, base: { ...some.base, tiltRad: [0, 0], massKg: 2, footprintM: FEET } };
        const bounds = { speedRadS: new Float64Array(n).fill(fast), accelRadS2: new Float64Array(n).fill(hard) };
        const least = stands(spec, bounds).movingNm(q.subarray(0, n));
        // The front edge, from (0.2, -0.15) to (0.2, 0.15): y. Right-handed about it the arm tips over forward.
        const hinged: ArmSpec = {
          ...spec,
          base: { ...spec.base, heightM: 0 },
          links: [link(n, Y, [-0.2, 0, spec.base.heightM], { massKg: 2, centreM: [-0.2, 0, 0] }), ...spec.links],
        };
        const torque = new Float64Array(n + 1);
        dynamics(hinged, { inertia: [...hinged.links.map(() => 'point' as const)] }).torqueNm(
          Float64Array.of(...q.subarray(0, n), 0),
          Float64Array.of(...speed.subarray(0, n).map((value) => value * fast), 0),
          Float64Array.of(...share.subarray(0, n).map((value) => value * hard), 0),
          torque,
        );
        // What holds the hinge about +y holds the arm back from tipping; what is left is the opposite of a negative need.
        expect(torque[n] as number).toBeGreaterThanOrEqual(least - 1e-6);
      }),
    );
  });
});
