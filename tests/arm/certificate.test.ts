import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { braking } from '../../src/arm/braking.ts';
import { BREAKS, certificate } from '../../src/arm/certificate.ts';
import { chain } from '../../src/arm/chain.ts';
import { keepOuts } from '../../src/arm/keep-outs.ts';
import { loads } from '../../src/arm/load.ts';
import type { ArmSpec, KeepOut } from '../../src/arm/spec.ts';
import type { WholeArmSpec } from '../../src/follower/spec.ts';
import { governor } from '../../src/follower/governor.ts';
import { wholeArm } from '../../src/follower/whole-arm.ts';
import { random } from '../../src/sim/random.ts';
import { type Accepted, motionFaults, type MotionLimits } from '../motion-laws.ts';
import { arm, builtArm, DEG, finite, link, planar, Y, Z } from './arms.ts';

type ArmLimits = Pick<WholeArmSpec, 'endSpeedMS' | 'keepOut'>;

const NONE: ArmLimits = { endSpeedMS: null, keepOut: [] };
const DT = Float64Array.of(0.02);

function whole(spec: ArmSpec, limits: ArmLimits, limitLoad = false): WholeArmSpec {
  return { arm: spec, ...limits, limitLoad, limitAccel: false, tip: null };
}

interface Ride {
  readonly commands: readonly Accepted[];
  readonly dtS: readonly number[];
}

/** A hand that now jumps, now creeps: targets for every joint, from a seed. */
function ride(
  spec: ArmSpec,
  joints: readonly MotionLimits[],
  limits: ArmLimits,
  start: readonly number[],
  seed: number,
  steps: number,
  limitLoad = false,
): Ride {
  const n = joints.length;
  const motion = governor(joints);
  const follow = wholeArm(whole(spec, limits, limitLoad), motion);
  const draw = random(seed, 0);
  motion.x.set(start);
  motion.target.set(start);
  motion.speed.set(joints.map((joint) => joint.speedRadS));
  const commands: Accepted[] = [{ tUs: 0, anglesRad: motion.x.slice() }];
  const dtS: number[] = [];
  let tUs = 0;
  for (let step = 0; step < steps; step++) {
    if (draw.uniform() < 0.15) {
      const { minRad, maxRad } = joints[step % n] as MotionLimits;
      motion.target[step % n] = minRad + (maxRad - minRad) * draw.uniform();
    }
    const dtUs = 5_000 + Math.round(35_000 * draw.uniform() ** 2);
    DT[0] = dtUs / 1e6;
    follow.step(DT, false, limitLoad);
    tUs += dtUs;
    dtS.push(dtUs / 1e6);
    commands.push({ tUs, anglesRad: motion.x.slice() });
  }
  return { commands, dtS };
}

function endsOf(spec: ArmSpec, anglesRad: ArrayLike<number>): Float64Array {
  const poser = chain(spec);
  poser.pose(Float64Array.from(anglesRad));
  return poser.at;
}

/** Speed of every link end between two commands, the fastest. */
function fastest(spec: ArmSpec, { commands, dtS }: Ride): number {
  let most = 0;
  for (const [k, dt] of dtS.entries()) {
    const from = endsOf(spec, (commands[k] as Accepted).anglesRad);
    const to = endsOf(spec, (commands[k + 1] as Accepted).anglesRad);
    for (let e = 0; e < from.length; e += 3)
      most = Math.max(most, Math.hypot(...[0, 1, 2].map((i) => (to[e + i] as number) - (from[e + i] as number))) / dt);
  }
  return most;
}

const random01 = finite(0, 1);
const jointLimits = (count: number): fc.Arbitrary<MotionLimits[]> =>
  fc
    .array(fc.tuple(finite(0.5, 3), finite(0.3, 4), finite(1, 20)), { minLength: count, maxLength: count })
    .map((list) =>
      list.map(([range, speedRadS, accelRadS2]) => ({ minRad: -range, maxRad: range, speedRadS, accelRadS2 })),
    );

const rigged = builtArm.chain((spec) =>
  fc.record({
    spec: fc.constant(spec),
    joints: jointLimits(spec.links.length),
    start: fc.array(random01, { minLength: spec.links.length, maxLength: spec.links.length }),
    seed: fc.integer(),
  }),
);

const startOf = (joints: readonly MotionLimits[], shares: readonly number[]): number[] =>
  joints.map(({ minRad, maxRad }, j) => minRad + (maxRad - minRad) * (shares[j] as number));

/** The place of a box or floor that a pose does not touch, or null. */
function clearPlaces(spec: ArmSpec, start: readonly number[], places: readonly KeepOut[]): readonly KeepOut[] {
  const poser = chain(spec);
  poser.pose(Float64Array.from(start));
  const gap = new Float64Array(1);
  return places.filter((place) => {
    keepOuts([place]).clearance(poser, gap);
    return (gap[0] as number) > 0;
  });
}

const boxes: fc.Arbitrary<KeepOut[]> = fc.array(
  fc.oneof(
    finite(-0.5, 3).map((zM): KeepOut => ({ kind: 'below', zM })),
    fc
      .tuple(finite(-1, 1), finite(-1, 1), finite(0, 4), finite(0.01, 0.5), finite(0.01, 0.5), finite(0.01, 1))
      .map(([x, y, z, dx, dy, dz]): KeepOut => ({ kind: 'box', minM: [x, y, z], maxM: [x + dx, y + dy, z + dz] })),
  ),
  { minLength: 1, maxLength: 4 },
);

describe('certified steps, on any arm and any hand, judged from the commands', () => {
  it('keep every joint’s limits and the cap on every link end', () => {
    fc.assert(
      fc.property(rigged, finite(0.05, 1), ({ spec, joints, start, seed }, endSpeedMS) => {
        const done = ride(spec, joints, { endSpeedMS, keepOut: [] }, startOf(joints, start), seed, 120);
        expect(motionFaults(done.commands, joints)).toEqual([]);
        expect(fastest(spec, done)).toBeLessThanOrEqual(endSpeedMS * (1 + 1e-6));
      }),
      { numRuns: 40, endOnFailure: true },
    );
  });

  it('keep every link out of floors and boxes, between the commands too', () => {
    const gap = new Float64Array(1);
    let refusals = 0;
    fc.assert(
      fc.property(rigged, boxes, ({ spec, joints, start, seed }, places) => {
        const from = startOf(joints, start);
        const keepOut = clearPlaces(spec, from, places);
        const done = ride(spec, joints, { endSpeedMS: null, keepOut }, from, seed, 120);
        expect(motionFaults(done.commands, joints)).toEqual([]);
        const poser = chain(spec);
        const kept = keepOuts(keepOut);
        const between = new Float64Array(joints.length);
        for (const [k, { anglesRad }] of done.commands.entries()) {
          const next = (done.commands[k + 1] ?? done.commands[k]) as Accepted;
          // A command is kept to the rounding; in between, braking and the straight line differ by little.
          for (const [share, least] of [
            [0, -1e-8],
            [0.25, -2e-3],
            [0.5, -2e-3],
            [0.75, -2e-3],
          ] as const) {
            for (let j = 0; j < between.length; j++)
              between[j] = (1 - share) * (anglesRad[j] as number) + share * (next.anglesRad[j] as number);
            poser.pose(between);
            kept.clearance(poser, gap);
            expect(gap[0]).toBeGreaterThanOrEqual(least);
            if (share === 0 && (gap[0] as number) < 0.01) refusals++;
          }
        }
      }),
      { numRuns: 40, endOnFailure: true },
    );
    expect(refusals).toBeGreaterThan(0);
  });

  it('raise no load over its limit, and bring down one that is over it already', () => {
    const motor = (spec: ArmSpec): ArmSpec => ({
      ...spec,
      links: spec.links.map((one) => ({
        ...one,
        massKg: 1,
        // A third of what the same arm would need stretched out: it starts over its limit in some poses, under in others.
        motor: { stallNm: 8, use: 0.5, holdUse: 0.4, stallA: null },
      })),
    });
    let over = 0;
    fc.assert(
      fc.property(rigged, ({ spec: bare, joints, start, seed }) => {
        const spec = motor(bare);
        const n = joints.length;
        const done = ride(spec, joints, NONE, startOf(joints, start), seed, 120, true);
        expect(motionFaults(done.commands, joints)).toEqual([]);
        const weigh = loads(spec, n).worst;
        const least = new Float64Array(n).fill(Number.POSITIVE_INFINITY);
        const now = new Float64Array(n);
        for (const { anglesRad } of done.commands) {
          weigh(Float64Array.from(anglesRad), now);
          for (let j = 0; j < n; j++) {
            if ((now[j] as number) > 1) over++;
            // At the looks it is exact; between two of them a load may bulge by a share of it.
            expect(now[j]).toBeLessThanOrEqual(Math.max(1, 1.02 * (least[j] as number)));
            least[j] = Math.min(least[j] as number, now[j] as number);
          }
        }
      }),
      { numRuns: 40, endOnFailure: true },
    );
    expect(over).toBeGreaterThan(0);
  });
});

/** A braking arm, looked at a thousand times on its way to a stand. */
function brakingLooks(
  spec: ArmSpec,
  joints: readonly MotionLimits[],
  x: readonly number[],
  v: readonly number[],
  look: (poser: ReturnType<typeof chain>, pose: Float64Array, speeds: Float64Array) => void,
): void {
  const poser = chain(spec);
  const stopS = joints.map(({ accelRadS2 }, j) => Math.abs(v[j] as number) / accelRadS2);
  const longest = Math.max(...stopS);
  for (let k = 0; k <= 1000; k++) {
    const times = stopS.map((stop) => Math.min(stop, (longest * k) / 1000));
    const pose = Float64Array.from(x, (from, j) => {
      const t = times[j] as number;
      return from + (v[j] as number) * t - 0.5 * Math.sign(v[j] as number) * (joints[j]?.accelRadS2 as number) * t * t;
    });
    const speeds = Float64Array.from(v, (from, j) => from * (1 - (times[j] as number) / ((stopS[j] as number) || 1)));
    poser.pose(pose);
    look(poser, pose, speeds);
  }
}

const heavy = (spec: ArmSpec, stallNm: readonly number[]): ArmSpec => ({
  ...spec,
  links: spec.links.map((one, i) => ({
    ...one,
    massKg: 1,
    motor: { stallNm: stallNm[i] as number, use: 1, holdUse: 1, stallA: null },
  })),
});

describe('a state from which the arm would break a limit while it brakes', () => {
  const NO_CAP = Float64Array.of(Number.POSITIVE_INFINITY);
  const state = rigged.chain((rig) => {
    const share = fc.array(finite(-1, 1), { minLength: rig.joints.length, maxLength: rig.joints.length });
    return share.map((shares) => ({
      ...rig,
      x: startOf(rig.joints, rig.start),
      // Such that a joint needs no more than a third of a radian to stop, as servos do.
      v: rig.joints.map(({ speedRadS, accelRadS2 }, j) => {
        return Math.min(speedRadS, Math.sqrt(0.6 * accelRadS2)) * (shares[j] as number);
      }),
    }));
  });
  type State = { spec: ArmSpec; joints: readonly MotionLimits[]; x: number[]; v: number[] };

  /** Judges the state itself: a step that ends where it begins. */
  const judged = ({ joints, x, v }: State, spec: ArmSpec, keepOut: readonly KeepOut[], cap: Float64Array): number => {
    const accel = Float64Array.from(joints, ({ accelRadS2 }) => accelRadS2);
    const load = spec.links.some(({ motor }) => motor !== null) ? loads(spec, joints.length) : null;
    const at = Float64Array.from(x);
    return certificate(spec, joints.length, accel, { keepOut }, load).judge(
      at,
      at,
      Float64Array.from(v),
      DT,
      cap,
      true,
    );
  };

  it('is refused for the speed of a link end, wherever on the way it is highest', () => {
    fc.assert(
      fc.property(state, (at) => {
        let most = 0;
        const velocities = new Float64Array(3 * at.spec.links.length + 3);
        brakingLooks(at.spec, at.joints, at.x, at.v, (poser, _pose, speeds) => {
          poser.velocities(speeds, velocities);
          for (let k = 3; k < velocities.length; k += 3) {
            most = Math.max(most, Math.hypot(...velocities.subarray(k, k + 3)));
          }
        });
        fc.pre(most > 1e-3);
        expect(judged(at, at.spec, [], Float64Array.of(most * (1 - 1e-7)))).toBe(BREAKS.endSpeed);
        expect(judged(at, at.spec, [], Float64Array.of(most * 1.5))).toBe(0);
      }),
      { numRuns: 200, endOnFailure: true },
    );
  });

  it('is refused for a speed that is highest between two looks: an arm that stretches out while its base still turns', () => {
    // The elbow opens while the base brakes slowly, so that the tip goes on getting faster for a while.
    const spec = arm([link(0, Z, [0, 0, 0.1]), link(1, Y, [0, 0, 0.3]), link(2, Y, [0, 0, 0.3])]);
    const joints = [0.3, 3, 0.4].map((accelRadS2) => ({ minRad: -3, maxRad: 3, speedRadS: 3, accelRadS2 }));
    const at: State = { spec, joints, x: [0, 1, 2.4], v: [1, 0.1, -1] };
    const velocities = new Float64Array(12);
    const speeds: number[] = [];
    brakingLooks(spec, joints, at.x, at.v, (poser, _pose, speed) => {
      poser.velocities(speed, velocities);
      speeds.push(Math.hypot(...velocities.subarray(9)));
    });
    const most = Math.max(...speeds);
    expect(speeds.indexOf(most)).toBeGreaterThan(10);
    const way = braking(
      3,
      Float64Array.from(joints, ({ accelRadS2 }) => accelRadS2),
    );
    way.plan(Float64Array.from(at.x), Float64Array.from(at.v));
    const poser = chain(spec);
    const looks = Array.from({ length: way.pieces + 1 }, (_, k) => {
      way.look(k);
      poser.pose(way.at);
      poser.velocities(way.speed, velocities);
      return Math.hypot(...velocities.subarray(9));
    });
    const cap = 0.5 * (most + Math.max(...looks));
    expect(cap).toBeGreaterThan(Math.max(...looks));
    expect(judged(at, spec, [], Float64Array.of(cap))).toBe(BREAKS.endSpeed);
    expect(judged(at, spec, [], Float64Array.of(1.1 * most))).toBe(0);
  });

  it('is refused for a floor that a link end only just touches on the way', () => {
    let tried = 0;
    fc.assert(
      fc.property(state, (at) => {
        let first = Number.NaN;
        let least = Number.POSITIVE_INFINITY;
        brakingLooks(at.spec, at.joints, at.x, at.v, (poser) => {
          let lowest = Number.POSITIVE_INFINITY;
          for (let k = 3; k < poser.at.length; k += 3) lowest = Math.min(lowest, poser.at[k + 2] as number);
          if (Number.isNaN(first)) first = lowest;
          least = Math.min(least, lowest);
        });
        if (first - least < 1e-4) return;
        tried++;
        expect(judged(at, at.spec, [{ kind: 'below', zM: least + 1e-8 }], NO_CAP)).toBe(BREAKS.keepOut);
        expect(judged(at, at.spec, [{ kind: 'below', zM: least - 1 }], NO_CAP)).toBe(0);
      }),
      { numRuns: 200, endOnFailure: true },
    );
    expect(tried).toBeGreaterThan(5);
  });

  it('is refused for a load that comes over its limit only on the way', () => {
    let tried = 0;
    fc.assert(
      fc.property(state, fc.nat(), (at, which) => {
        const n = at.joints.length;
        const i = 1 + (which % (n - 1));
        const weighed = loads(
          heavy(
            at.spec,
            at.x.map(() => 1),
          ),
          n,
        );
        const torque = new Float64Array(n);
        let first = Number.NaN;
        let most = 0;
        brakingLooks(at.spec, at.joints, at.x, at.v, (_poser, pose) => {
          weighed.torqueNm(pose, torque);
          const size = Math.abs(torque[i] as number);
          if (Number.isNaN(first)) first = size;
          most = Math.max(most, size);
        });
        if (most - first < 1e-4) return;
        tried++;
        // All motors but one are as strong as one likes.
        const strong = at.x.map((_, j) => (j === i ? most * (1 - 1e-7) : 1e6));
        expect(judged(at, heavy(at.spec, strong), [], NO_CAP)).toBe(BREAKS.load);
        expect(
          judged(
            at,
            heavy(
              at.spec,
              strong.map(() => 1e6),
            ),
            [],
            NO_CAP,
          ),
        ).toBe(0);
      }),
      { numRuns: 200, endOnFailure: true },
    );
    expect(tried).toBeGreaterThan(5);
  });

  it('is refused for what the step itself goes through, though both its ends are clear', () => {
    // By hand: a bar of 0.5 m turns by 0.2 rad, 0.1 m at its end, and stands; the rod it goes through is 10 mm thick.
    const bar = arm([link(0, Z, [0.5, 0, 0])], { heightM: 0.2 });
    const rod: KeepOut = { kind: 'box', minM: [0.45, -0.005, 0], maxM: [0.46, 0.005, 1] };
    const { judge } = certificate(bar, 1, Float64Array.of(10), { keepOut: [rod] }, null);
    const turn = (from: number, to: number): number =>
      judge(Float64Array.of(from), Float64Array.of(to), Float64Array.of(0), DT, NO_CAP, false);
    expect(turn(-0.1, 0.1)).toBe(BREAKS.keepOut);
    expect(turn(0.1, 0.3)).toBe(0);
  });
});

/** An arm of 0.5 m with its tip on the way to a floor below it, and joints as quick as a hobby servo's. */
const reach = arm([link(0, Z, [0, 0, 0.1]), link(1, Y, [0, 0, 0.25]), link(2, Y, [0, 0, 0.25])]);
const quick: MotionLimits[] = [0, 1, 2].map(() => ({ minRad: -2.5, maxRad: 2.5, speedRadS: 3, accelRadS2: 15 }));

/** Steps towards a target for a while; the poses on the way. */
function towards(
  limits: ArmLimits,
  from: readonly number[],
  targets: readonly (readonly number[])[],
  steps: number,
): readonly (readonly number[])[] {
  const motion = governor(quick);
  const follow = wholeArm(whole(reach, limits), motion);
  motion.x.set(from);
  motion.speed.fill(3);
  DT[0] = 0.02;
  return targets.flatMap((target) => {
    motion.target.set(target);
    return Array.from({ length: steps }, () => {
      follow.step(DT, false, false);
      return [...motion.x];
    });
  });
}

describe('an arm that is held back', () => {
  const DOWN = [0, 2.2, 0.4];
  const UP = [0, 0.3, 0.3];
  const places: Readonly<Record<string, KeepOut>> = {
    'a floor': { kind: 'below', zM: 0 },
    'a box': { kind: 'box', minM: [0.2, -0.1, -0.2], maxM: [0.6, 0.1, 0.02] },
    'the edge of a box that its arm lies across': { kind: 'box', minM: [0.15, -0.2, 0], maxM: [0.25, 0.2, 0.17] },
  };

  for (const [what, place] of Object.entries(places)) {
    it(`comes as near to ${what} as a millimetre, and leaves it again as quickly as one that was never held`, () => {
      const limits: ArmLimits = { endSpeedMS: null, keepOut: [place] };
      // Ten seconds of pressing, so that what is left of each step has become as small as it ever gets.
      const pressed = towards(limits, UP, [DOWN], 500).at(-1) as readonly number[];
      const gap = new Float64Array(1);
      const poser = chain(reach);
      poser.pose(Float64Array.from(pressed));
      keepOuts([place]).clearance(poser, gap);
      expect(gap[0]).toBeLessThan(1e-3);
      expect(gap[0]).toBeGreaterThanOrEqual(-1e-8);
      const away = (from: ArmLimits): number =>
        towards(from, pressed, [UP], 100).findIndex((pose) => Math.abs((pose[1] as number) - 0.3) < 1e-6);
      expect(away(NONE)).toBeGreaterThan(10);
      expect(away(limits)).toBeLessThanOrEqual(away(NONE) + 8);
    });
  }

  it('leaves a keep-out that was drawn around it, and never goes deeper', () => {
    const inside = [0, 1.9, 0.3];
    const place: KeepOut = { kind: 'box', minM: [0, -0.3, -0.5], maxM: [0.6, 0.3, 0.05] };
    const gap = new Float64Array(1);
    const depth = (pose: readonly number[]): number => {
      const poser = chain(reach);
      poser.pose(Float64Array.from(pose));
      keepOuts([place]).clearance(poser, gap);
      return Math.max(0, -(gap[0] as number));
    };
    const deepest = depth(inside);
    expect(deepest).toBeGreaterThan(0.05);
    for (const pose of towards({ endSpeedMS: null, keepOut: [place] }, inside, [DOWN], 100)) {
      expect(depth(pose)).toBeLessThanOrEqual(deepest + 1e-9);
    }
    const left = towards({ endSpeedMS: null, keepOut: [place] }, inside, [UP], 100).at(-1) as readonly number[];
    expect(depth(left)).toBe(0);
    for (const [j, angle] of UP.entries()) expect(left[j]).toBeCloseTo(angle, 6);
  });

  it('does not go through a thin board, however far a step would take it', () => {
    // By hand: the tip sweeps through y = 0.05 at 0.5 * 3 = 1.5 m/s, 60 mm in a step of 40 ms; the board is 1 mm thick.
    const board: KeepOut = { kind: 'box', minM: [0.1, 0.05, 0], maxM: [0.7, 0.051, 0.6] };
    const motion = governor(quick.map((joint) => ({ ...joint, accelRadS2: 500 })));
    const follow = wholeArm(whole(reach, { endSpeedMS: null, keepOut: [board] }), motion);
    motion.x.set([-1, 1.57, 0]);
    motion.speed.fill(3);
    motion.target.set([1, 1.57, 0]);
    DT[0] = 0.04;
    for (let step = 0; step < 100; step++) follow.step(DT, false, false);
    expect(endsOf(reach, motion.x)[10]).toBeLessThan(0.05);
    expect(endsOf(reach, motion.x)[10]).toBeGreaterThan(0.03);
  });

  it('uses the whole of its cap: nine tenths of it, for most of a long way', () => {
    const cap = 0.25;
    const poses = towards({ endSpeedMS: cap, keepOut: [] }, [-1.5, 1.4, 0.2], [[1.5, 1.5, 0.1]], 260);
    const moved = poses.map((pose, k) => {
      const from = endsOf(reach, k === 0 ? [-1.5, 1.4, 0.2] : (poses[k - 1] as readonly number[]));
      const to = endsOf(reach, pose);
      return Math.hypot(...[9, 10, 11].map((e) => (to[e] as number) - (from[e] as number))) / 0.02;
    });
    expect(Math.max(...moved)).toBeLessThanOrEqual(cap * (1 + 1e-6));
    expect(moved.filter((speed) => speed > 0.9 * cap).length).toBeGreaterThan(150);
  });

  it('is refused with what it would break', () => {
    const floor: KeepOut = { kind: 'below', zM: 0 };
    const bar = planar(
      [1],
      [{ massKg: 1, centreM: [1, 0, 0], motor: { stallNm: 10, use: 1, holdUse: 0.5, stallA: null } }],
    );
    const { judge } = certificate(bar, 1, Float64Array.of(10), { keepOut: [floor] }, loads(bar, 1));
    const asked = (x0: number, x: number, v: number, cap: number): number => {
      DT[0] = 0.02;
      return judge(Float64Array.of(x0), Float64Array.of(x), Float64Array.of(v), DT, Float64Array.of(cap), true);
    };
    const none = Number.POSITIVE_INFINITY;
    // By hand: holding takes 9.81 cos q of the 5 N m that it may hold, so it is over below 59.3 degrees.
    expect(asked(90 * DEG, 90 * DEG, 0, none)).toBe(0);
    expect(asked(65 * DEG, 64 * DEG, -0.2, none)).toBe(0);
    expect(asked(60 * DEG, 58 * DEG, -1.7, none)).toBe(BREAKS.load);
    // Over its limit already: up is allowed, down is not.
    expect(asked(30 * DEG, 31 * DEG, 0.8, none)).toBe(0);
    expect(asked(30 * DEG, 29 * DEG, -0.8, none)).toBe(BREAKS.load);
    // 1 m at 0.3 rad/s; and a step that is slow at its end but went 1 degree in 0.02 s: 0.87 m/s.
    expect(asked(90 * DEG, 90 * DEG, 0.3, 0.31)).toBe(0);
    expect(asked(90 * DEG, 90 * DEG, 0.3, 0.29)).toBe(BREAKS.endSpeed);
    expect(asked(90 * DEG, 91 * DEG, 0, 0.5)).toBe(BREAKS.endSpeed);
    // At 1 rad/s it needs 0.05 rad to stop: from 0.04 it would end below the floor.
    expect(asked(0.06, 0.04, -1, none)).toBe(BREAKS.keepOut);
  });
});

describe('the laws above', () => {
  it('catch a certificate that looks at the step’s end only', () => {
    const limits = quick;
    const motion = governor(limits);
    motion.speed.fill(3);
    motion.x.set([0, 0.3, 0.3]);
    motion.target.set([0, 2.2, 0.4]);
    DT[0] = 0.02;
    const kept = keepOuts([{ kind: 'below', zM: 0 }]);
    const poser = chain(reach);
    const gap = new Float64Array(1);
    const clearance = (): number => {
      poser.pose(motion.x);
      kept.clearance(poser, gap);
      return gap[0] as number;
    };
    let least = Number.POSITIVE_INFINITY;
    for (let step = 0; step < 100; step++) {
      motion.step(DT);
      // Once it is near it brakes, too late.
      if (clearance() < 0.01) motion.braking.fill(1);
      least = Math.min(least, clearance());
    }
    expect(least).toBeLessThan(-0.01);
  });
});
