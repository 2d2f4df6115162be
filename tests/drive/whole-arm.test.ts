import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { type Chain, chain } from '../../src/arm/chain.ts';
import type { ArmSpec, KeepOut, LinkSpec, Vec3 } from '../../src/arm/spec.ts';
import type { FollowerSpec, WholeArmSpec } from '../../src/follower/spec.ts';
import { DEG, followerJoint, followerSpec, leaderSpec, MS, planOf, S } from '../plans.ts';
import { driveFaults } from './laws.ts';
import type { Staging } from './random-plans.ts';
import { play, randomScenes } from './random-scenes.ts';
import { Rehearsal, type Told } from './rehearsal.ts';

const LONG_MS = 60_000;
const between = (min: number, max: number): fc.Arbitrary<number> => fc.double({ min, max, noNaN: true });

const link = (joint: number, axis: Vec3, lengthM: number): LinkSpec => ({
  joint,
  axis,
  toM: [0, 0, lengthM],
  massKg: 0.2,
  centreM: [0, 0, lengthM / 2],
  counterweight: null,
  spring: null,
  motor: null,
  dragNm: 0,
  cable: null,
});

/** A turning base, a shoulder and an elbow, standing straight up at rest, clear of everything. */
const randomArm: fc.Arbitrary<{ arm: ArmSpec; keepOut: KeepOut[] }> = fc
  .record({
    heightM: between(0.02, 0.1),
    upperM: between(0.1, 0.9),
    foreM: between(0.4, 0.9),
    box: fc.boolean(),
    floor: fc.boolean(),
  })
  .map(({ heightM, upperM, foreM, box, floor }) => {
    const base = { heightM, tiltRad: [0, 0] as const, massKg: null, footprintM: null, friction: null };
    const links = [link(0, [0, 0, 1], 0.05), link(1, [0, 1, 0], upperM), link(2, [0, 1, 0], foreM)];
    const places: KeepOut[] = [];
    if (floor) places.push({ kind: 'below', zM: 0 });
    // Beside the arm and as high as its elbow: a lamp stand that every swing forward meets.
    if (box) places.push({ kind: 'box', minM: [0.06, -0.3, 0], maxM: [0.5, 0.3, heightM + upperM] });
    return { arm: { base, links, payload: null }, keepOut: places };
  });

const randomFollower: fc.Arbitrary<FollowerSpec> = fc
  .record({
    arm: randomArm,
    endSpeedMS: fc.option(between(0.1, 1), { nil: null }),
    speedRadS: between(60 * DEG, 300 * DEG),
    accelRadS2: between(100 * DEG, 2000 * DEG),
    periodUs: fc.constantFrom(10 * MS, 20 * MS, 50 * MS),
  })
  .map(({ arm, endSpeedMS, speedRadS, accelRadS2, periodUs }) => {
    const whole: WholeArmSpec = {
      arm: arm.arm,
      endSpeedMS,
      keepOut: arm.keepOut,
      limitLoad: false,
      limitAccel: false,
      tip: null,
    };
    // Leaning forward rather than back, so that it meets what stands before it.
    const joints = [0, 1, 2].map((j) =>
      followerJoint(j, {
        speedRadS,
        accelRadS2,
        gain: 2,
        minRad: (j === 0 ? -90 : -5) * DEG,
        maxRad: (60 + 40 * j) * DEG,
      }),
    );
    return followerSpec(joints, { periodUs, whole });
  });

const randomStaging: fc.Arbitrary<Staging> = fc
  .record({ spec: randomFollower, unison: fc.boolean() })
  .map(({ spec, unison }) => ({
    plan: planOf([spec], { leader: leaderSpec(3), unison }),
    starts: [{ poseRad: null, unasked: true, awake: false, board: 0 }],
    busyUs: 0,
  }));

/** Ends of an arm's links at a command, base first. */
function endsAt(of: Chain, { anglesRad }: Told): Float64Array {
  of.pose(anglesRad);
  return of.at.slice();
}

const distance = (a: Float64Array, b: Float64Array, k: number): number =>
  Math.hypot(...[0, 1, 2].map((i) => (a[3 * k + i] as number) - (b[3 * k + i] as number)));

/** What only the arm as a whole can break, in words: judged from the commands alone, by where its links are at each. */
function wholeFaults(spec: FollowerSpec, told: readonly Told[]): string[] {
  const { arm, endSpeedMS, keepOut } = spec.whole as WholeArmSpec;
  const links = chain(arm);
  const faults: string[] = [];
  let before: { at: Float64Array; tUs: number } | null = null;
  for (const each of told) {
    if (each.kind !== 'move' || each.waking) {
      before = null;
      continue;
    }
    const at = endsAt(links, each);
    for (let k = 1; k <= arm.links.length; k++) {
      // The straight way between two places is no longer than the way the end has gone.
      const speed = before === null ? 0 : distance(at, before.at, k) / ((each.tUs - before.tUs) / 1e6);
      if (speed > (endSpeedMS ?? Infinity) * (1 + 1e-6)) faults.push(`end ${k} at ${speed} m/s at ${each.tUs} us`);
      for (const place of keepOut)
        if (isInside(at, k, place)) faults.push(`link ${k} inside a ${place.kind} at ${each.tUs} us`);
    }
    before = { at, tUs: each.tUs };
  }
  return faults;
}

const ROUNDING_M = 1e-6;

/** Whether a point of the link that ends at k is inside a keep-out; looked at every twentieth of the link. */
function isInside(at: Float64Array, k: number, place: KeepOut): boolean {
  for (let s = 0; s <= 1; s += 0.05) {
    const point = [0, 1, 2].map((i) => (1 - s) * (at[3 * k - 3 + i] as number) + s * (at[3 * k + i] as number));
    const [x, y, z] = point as [number, number, number];
    if (place.kind === 'below') {
      if (s > 0 && z < place.zM - ROUNDING_M) return true;
    } else if (
      [x, y, z].every(
        (p, i) => p > (place.minM[i] as number) + ROUNDING_M && p < (place.maxM[i] as number) - ROUNDING_M,
      )
    )
      return true;
  }
  return false;
}

const faultsOf = (staging: Staging, on: Rehearsal): string[] => [
  ...driveFaults({ plan: staging.plan, boardOf: [0], busyUs: 0, happened: on.happened, told: on.told }),
  ...wholeFaults(staging.plan.followers[0] as FollowerSpec, on.told),
];

describe('whatever happens to an arm whose geometry is known', () => {
  it(
    'no joint, no link end and no link breaks a law, although each holds the others back',
    () => {
      const seen = { commands: 0, moving: 0 };
      fc.assert(
        fc.property(randomStaging, randomScenes, (staging, scenes) => {
          const on = play(staging, scenes);
          seen.commands += on.told.length;
          seen.moving += on.told.filter((told) => told.moving).length;
          expect(faultsOf(staging, on)).toEqual([]);
        }),
        { numRuns: 100 },
      );
      expect(seen.moving).toBeGreaterThan(0.1 * seen.commands);
    },
    LONG_MS,
  );

  it('its laws catch an arm that is driven joint by joint into its keep-outs and over its speed', () => {
    const places: KeepOut[] = [
      { kind: 'below', zM: 0 },
      { kind: 'box', minM: [0.06, -0.3, 0], maxM: [0.5, 0.3, 0.4] },
    ];
    const base = { heightM: 0.05, tiltRad: [0, 0] as const, massKg: null, footprintM: null, friction: null };
    const links = [link(0, [0, 0, 1], 0.05), link(1, [0, 1, 0], 0.3), link(2, [0, 1, 0], 0.6)];
    const whole: WholeArmSpec = {
      arm: { base, links, payload: null },
      endSpeedMS: 0.25,
      keepOut: places,
      limitLoad: false,
      limitAccel: false,
      tip: null,
    };
    const joints = [0, 1, 2].map((j) => followerJoint(j));
    const bow = (spec: FollowerSpec): string[] => {
      const on = new Rehearsal(planOf([spec], { leader: leaderSpec(3) })).following().plays(6 * S, () => [0, 60, 80]);
      return wholeFaults({ ...spec, whole }, on.told);
    };
    const faults = bow(followerSpec(joints));
    for (const what of ['m/s', 'inside a below', 'inside a box'])
      expect(faults.some((fault) => fault.includes(what))).toBe(true);
    expect(bow(followerSpec(joints, { whole }))).toEqual([]);
  });
});
