import { join } from 'node:path';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { LIMITS } from '../../src/follower/reasons.ts';
import type { CompiledRig } from '../../src/rig/compiled.ts';
import { isTakeFault } from '../../src/take/fault.ts';
import type { Motion } from '../../src/take/motion.ts';
import { pacedReel } from '../../src/take/paced-reel.ts';
import { player } from '../../src/take/player.ts';
import type { Take } from '../../src/take/reader.ts';
import { accelAt, path, peakSpeed, pieces } from '../../src/take/smooth-path.ts';
import { type Demand, leastStretch, stretchFor } from '../../src/take/stretching.ts';
import { timeScale, weights } from '../../src/take/weighted.ts';
import { Performance, rigOf, rigYaml } from '../bridge/performance.ts';
import { expectLawful } from './laws.ts';
import { fileWriter, headerOf, opened, takesFolderForTests, TWO_ARMS } from './studio.ts';

const folder = takesFolderForTests();
const CAST = { leader: [0, 1], followers: [] };
/** Of TWO_ARMS: 60 deg/s and 240 deg/s^2. */
const SPEED = Math.PI / 3;
const ACCEL = (4 * Math.PI) / 3;
/** Motions are stretched to stay at this share of their limits, just below where a joint counts as moving at its limit. */
const SHARE = 0.998;

/** Ten seconds of both leader joints at these angles, from rest where they begin and end at a turn. */
async function led(name: string, angleRad: (s: number) => number, seconds = 10): Promise<Take> {
  const writer = fileWriter(folder, name, headerOf(TWO_ARMS));
  for (let i = 0; i <= 200 * seconds; i++) {
    writer.row.tUs = i * 5_000;
    writer.row.event = 1;
    writer.row.poseRad.fill(angleRad(i / 200));
    writer.append();
  }
  await writer.end();
  return opened(join(folder, `${name}.arrows`));
}

function cosine(name: string, amplitudeRad: number, hz: number): Promise<Take> {
  return led(name, (s) => amplitudeRad * Math.cos(2 * Math.PI * hz * s));
}

function motionOf(take: Take, { plan }: CompiledRig = TWO_ARMS, loopBlendS: number | null = null): Motion {
  return { take, plan, cast: CAST, by: 'leader', fromUs: 0, toUs: take.durationUs, loopBlendS };
}

function demandsOf(motion: Motion, factors: readonly number[] = motion.plan.followers.map(() => 1)): readonly Demand[] {
  const work = leastStretch(motion, factors);
  let step = work.next();
  while (step.done !== true) step = work.next();
  return step.value;
}

/** What a motion of this frequency is after the Gaussian that halves 5 Hz and a spline of points 10 ms apart. */
function kept(hz: number): number {
  const x = Math.PI * hz * 0.01;
  return 0.5 ** ((hz / 5) ** 2) * (Math.sin(x) / x) ** 4;
}

describe('the least stretch of time', () => {
  it('is 1 for a motion that keeps every limit', async () => {
    // Amplitude 0.3 rad at 0.2 Hz: peak speed 0.3 * 2 pi * 0.2 = 0.377 rad/s, peak acceleration 0.474 rad/s^2.
    expect(stretchFor(demandsOf(motionOf(await cosine('gentle', 0.3, 0.2))))).toBe(1);
  });

  it('is that of the speed limit where speed asks for most', async () => {
    // Amplitude 1 rad at 0.25 Hz: peak speed pi / 2 = 1.571 rad/s, 1.5 times the limit; acceleration 2.47 of 4.19 rad/s^2.
    const demands = demandsOf(motionOf(await cosine('fast', 1, 0.25)));
    expect(demands[0]).toMatchObject({ kind: 'speed', of: 'base' });
    // The first quarter of a period, or any half period later.
    expect(((demands[0]?.atS ?? 0) - 1) % 2).toBeCloseTo(0, 1);
    expect(stretchFor(demands)).toBeCloseTo(((Math.PI / 2) * kept(0.25)) / (SHARE * SPEED), 3);
  });

  it('is the root of the share of the acceleration limit where acceleration asks for most', async () => {
    // Amplitude 0.25 rad at 1 Hz: peak acceleration 0.25 (2 pi)^2 = 9.87 rad/s^2, whose root over the limit is 1.535; speed
    // asks for 1.571 / 1.047 = 1.5.
    const demands = demandsOf(motionOf(await cosine('hard', 0.25, 1)));
    expect(demands[0]?.kind).toBe('acceleration');
    const peak = 0.25 * (2 * Math.PI) ** 2 * kept(1);
    expect(stretchFor(demands)).toBeCloseTo(Math.sqrt(peak / (SHARE * ACCEL)), 2);
  });

  it('is less where a follower is slower anyhow, and more where the pace is lower', async () => {
    const motion = motionOf(await cosine('paced', 1, 0.25));
    const alone = stretchFor(demandsOf(motion));
    expect(stretchFor(demandsOf(motion, [1.25, 1.25]))).toBeCloseTo(alone / 1.25, 9);
    expect(stretchFor(demandsOf({ ...motion, plan: { ...motion.plan, pace: 0.8 } }))).toBeCloseTo(alone / 0.8, 9);
  });

  it("is not asked for by a converter's steps", async () => {
    // One count of a 10-bit converter over 270 degrees, up and down every 40 ms: 2.6e5 deg/s^2 in 1 ms.
    const step = ((270 / 1023) * Math.PI) / 180;
    const take = await led('steps', (s) => (Math.floor(s / 0.04) % 2 === 0 ? 0 : step), 5);
    expect(stretchFor(demandsOf(motionOf(take)))).toBe(1);
  });

  it('is not asked for by a start or an end in the middle of a motion: the governor comes up to it and stops', async () => {
    // Amplitude 0.6 rad at 0.25 Hz, from its fastest moment to its fastest moment: 0.94 of 1.05 rad/s.
    const motion = motionOf(await led('cut-out', (s) => 0.6 * Math.sin(0.5 * Math.PI * s), 8));
    expect(stretchFor(demandsOf(motion))).toBe(1);
    const commands = played(motion, [1, 1], TWO_ARMS, 60);
    expectLawful(TWO_ARMS, commands);
    const beganUs = commands[0]?.tUs ?? 0;
    const inside = commands.filter(({ tUs }) => tUs > beganUs + 1_000_000 && tUs < beganUs + 7_900_000);
    expect(inside.length).toBeGreaterThan(600);
    expect(inside.filter(({ isLimited }) => isLimited)).toEqual([]);
  });

  it('counts the seam of a loop', async () => {
    // A ramp from -0.8 to 0.8 rad that has to come back in half a second: 1.6 rad by minimum jerk at 1.875 times its mean
    // speed (T. Flash, N. Hogan, J. Neurosci. 5 (1985)) is 6 rad/s, and faster still from and to a speed the other way.
    const take = await led('ramp', (s) => 0.8 * Math.sin(Math.PI * (s / 10 - 0.5)));
    expect(stretchFor(demandsOf(motionOf(take)))).toBe(1);
    const [worst] = demandsOf(motionOf(take, TWO_ARMS, 0.5));
    expect(worst?.atS).toBeGreaterThan(9.9);
    expect(stretchFor(demandsOf(motionOf(take, TWO_ARMS, 0.5)))).toBeGreaterThan(4);
  });
});

interface Command {
  readonly tUs: number;
  readonly follower: number;
  readonly x: Float64Array;
  readonly isLimited: boolean;
}

/** Every command of a motion that is played, and whether the governor held any joint back in it. */
function played(motion: Motion, factors: readonly number[], rig: CompiledRig, forS: number): readonly Command[] {
  const commands: Command[] = [];
  let isPlaying = false;
  const performance = new Performance(rig, {
    onStart: (drive, events$) => {
      const made = drive.followers.map((f) => f.commands);
      events$.subscribe(() => {
        for (const f of drive.followers) {
          if (f.commands === made[f.index]) continue;
          made[f.index] = f.commands;
          const { governor, limits, targetRad } = f.arm;
          if (!isPlaying || f.is.state !== 'following') continue;
          const isBehind = governor.x.some((x, j) => Math.abs(x - (targetRad[j] as number)) > 1e-9);
          const isLimited = isBehind || limits.some((bits) => (bits & LIMITS.speed) !== 0);
          commands.push({ tUs: drive.common.nowUs[0] as number, follower: f.index, x: governor.x.slice(), isLimited });
        }
      });
    },
  });
  performance.run(1_000_000);
  const own = motion.plan.followers.map(({ joints }, follower) => ({ follower, joints: joints.map((_, j) => j) }));
  const running = player(performance.live, performance.clock, pacedReel(motion, factors), {
    cast: { leader: [], followers: own },
    by: 'commands',
    posed: new Uint8Array(2),
    countInUs: 1_500_000,
    changed: (phase) => {
      isPlaying = phase === 'playing';
    },
  });
  while (running.is.phase !== 'over' && running.is.atUs < forS * 1e6) performance.run(100_000);
  running.stop();
  expect(performance.bugs).toEqual([]);
  return commands;
}

describe('a motion that is played as much slower as it takes', () => {
  it.each([
    ['speed', 1, 0.25],
    ['acceleration', 0.25, 1],
  ] as const)('is never held back by the governor, and a little faster it is (%s)', async (kind, amplitude, hz) => {
    const motion = motionOf(await cosine(`held-back-${kind}`, amplitude, hz));
    const demands = demandsOf(motion);
    expect(demands[0]?.kind).toBe(kind);
    const factor = stretchFor(demands);
    const slow = played(motion, [factor, factor], TWO_ARMS, 60);
    expect(slow.length).toBeGreaterThan(1_200);
    expect(slow.filter(({ isLimited }) => isLimited)).toEqual([]);
    expectLawful(TWO_ARMS, slow);
    const faster = played(motion, [0.98 * factor, 0.98 * factor], TWO_ARMS, 60);
    expect(faster.filter(({ isLimited }) => isLimited).length).toBeGreaterThan(50);
  });

  it('keeps that promise through the seam of a loop', async () => {
    const take = await led('looped', (s) => 0.4 * Math.sin(Math.PI * (s / 4 - 0.5)), 4);
    const motion = motionOf(take, TWO_ARMS, 1);
    const factor = stretchFor(demandsOf(motion));
    expect(factor).toBeGreaterThan(1);
    const commands = played(motion, [factor, factor], TWO_ARMS, 3 * 5 * factor);
    expect(commands.length).toBeGreaterThan(500);
    expect(commands.filter(({ isLimited }) => isLimited)).toEqual([]);
    // Round after round the same.
    const reach = (from: number, to: number): number =>
      Math.max(
        ...commands
          .filter(({ tUs }) => tUs - (commands[0]?.tUs ?? 0) >= from && tUs - (commands[0]?.tUs ?? 0) < to)
          .map(({ x }) => x[0] ?? 0),
      );
    const roundUs = 5e6 * factor;
    expect(reach(roundUs, 2 * roundUs)).toBeCloseTo(reach(2 * roundUs, 2.9 * roundUs), 3);
  });
});

const SIZED = rigOf(
  rigYaml(
    [
      ['wren', 'sim:arm?name=wren', arm(100)],
      ['stork', 'sim:arm?name=stork', arm(400)],
    ],
    '',
  ),
);

/** A straight arm of two links, so long in all. */
function arm(mm: number): string {
  const link = (joint: string): string => `{ joint: ${joint}, axis: y, to_mm: [0, 0, ${mm / 2}], mass_g: 10 }`;
  return `    arm: { links: [${link('base')}, ${link('elbow')}] }`;
}

describe('a cap on the speed of link ends', () => {
  const capped = rigOf(
    rigYaml([
      ['wren', 'sim:arm?name=wren', `    tip_speed_mm_s: 250\n${arm(400)}`],
      ['stork', 'sim:arm?name=stork'],
    ]),
  );

  it('is kept by the same promise', async () => {
    const motion = motionOf(await cosine('capped', 0.5, 0.25), capped);
    const demands = demandsOf(motion);
    expect(demands[0]).toMatchObject({ follower: 'wren', of: 'link ends', kind: 'end speed' });
    const factor = stretchFor(demands);
    expect(played(motion, [factor, factor], capped, 60).filter(({ isLimited }) => isLimited)).toEqual([]);
    const faster = played(motion, [0.97 * factor, 0.97 * factor], capped, 60);
    expect(faster.filter(({ isLimited }) => isLimited).length).toBeGreaterThan(50);
  });
});

describe('the weight of an arm', () => {
  it('stretches its time as a pendulum of its size: T = 2 pi sqrt(L / g)', () => {
    // g = 9.80665 m/s^2 (3rd CGPM, 1901): periods of 0.634482 s at 0.1 m and 2.006409 s at 1 m.
    const period = (m: number): number => 2 * Math.PI * Math.sqrt(m / 9.80665);
    expect(period(0.1)).toBeCloseTo(0.634482, 6);
    expect(period(1)).toBeCloseTo(2.006409, 6);
    expect(timeScale(1 / 0.1)).toBeCloseTo(period(1) / period(0.1), 12);
    expect(timeScale(4)).toBe(2);
  });

  it('plays each follower on its own time, and the first at the end waits there for the others', async () => {
    const take = await cosine('weighed', 0.3, 0.2);
    expect(weights(take, SIZED.plan)).toEqual([1, 2]);
    const last = [0, 0];
    const [least, most] = [[9, 9] as [number, number], [-9, -9] as [number, number]];
    let before = 0;
    for (const { tUs, followers } of pacedReel(motionOf(take, SIZED), [1, 2])) {
      expect(tUs).toBeGreaterThanOrEqual(before);
      before = tUs;
      const f = followers.findIndex(({ commanded }) => commanded === 1) as 0 | 1;
      const angle = followers[f]?.angleRad[0] ?? Number.NaN;
      if (tUs < 1_000_000) least[f] = Math.min(least[f], angle);
      most[f] = Math.max(most[f], angle);
      last[f] = tUs;
    }
    // Ten seconds, and what the filter needs to stand at either end: 31 samples and two of the spline, on its own time.
    expect(last.map((us) => Math.round(us / 1e5) / 10)).toEqual([20.7, 20.7]);
    // A second of the take for the one is half of it for the other: 0.3 cos(2 pi 0.2 s), a sixth of a second later.
    expect(least[0]).toBeCloseTo(0.3 * Math.cos(0.4 * Math.PI * (1 - 0.17)), 1);
    expect(least[1]).toBeCloseTo(0.3 * Math.cos(0.4 * Math.PI * (0.5 - 0.17)), 1);
    expect(most).toEqual([expect.closeTo(0.3, 2), expect.closeTo(0.3, 2)]);
  });

  it('lets each follower loop in its own time', async () => {
    const take = await led('swing', (s) => 0.2 * Math.cos(Math.PI * s), 4);
    const turns: [number[], number[]] = [[], []];
    const before = [
      [0, 0],
      [0, 0],
    ] as [number[], number[]];
    for (const { tUs, followers } of pacedReel(motionOf(take, SIZED, 2), [1, 2])) {
      if (tUs > 40_000_000) break;
      const f = followers.findIndex(({ commanded }) => commanded === 1) as 0 | 1;
      const angle = followers[f]?.angleRad[0] ?? Number.NaN;
      const [older = 0, old = 0] = before[f];
      if (old < older && old <= angle && old < -0.1) turns[f].push(tUs / 1e6);
      before[f] = [old, angle];
    }
    // Two swings and a blend of a round of 6 s: the pendulum of four times the length takes twice the time for it.
    expect(turns[0].length).toBeGreaterThan(10);
    for (let k = 2; k < turns[0].length; k++) expect((turns[0][k] ?? 0) - (turns[0][k - 2] ?? 0)).toBeCloseTo(6, 0);
    for (let k = 2; k < turns[1].length; k++) expect((turns[1][k] ?? 0) - (turns[1][k - 2] ?? 0)).toBeCloseTo(12, 0);
  });

  it('is that of the heaviest for all of them in unison', async () => {
    const take = await cosine('unison', 0.3, 0.2);
    expect(weights(take, { ...SIZED.plan, unison: true })).toEqual([2, 2]);
  });

  it('says which follower has no size', async () => {
    const found = weights(await cosine('no-arm', 0.1, 0.2), TWO_ARMS.plan);
    expect(isTakeFault(found as object) ? found : 'weights').toMatchObject({ code: 'TAKE_ARM' });
  });
});

describe('the path that is judged and commanded', () => {
  const values = fc.array(fc.double({ min: -1, max: 1, noNaN: true }), { minLength: 1, maxLength: 60 });
  const sampled = (list: readonly number[]): Float64Array[] => list.map((value) => Float64Array.of(value));

  it('stays between the samples, begins and ends standing at the first and the last', () => {
    fc.assert(
      fc.property(values, (list) => {
        const along = path(sampled(list), 1);
        const [low, high] = [Math.min(...list), Math.max(...list)];
        along.to(0);
        expect([along.anglesRad[0], along.speedsRadS[0]]).toEqual([
          expect.closeTo(list[0] ?? 0, 9),
          expect.closeTo(0, 9),
        ]);
        for (let s = 0; along.to(s); s += 0.0037) {
          expect(along.anglesRad[0]).toBeGreaterThanOrEqual(low - 1e-9);
          expect(along.anglesRad[0]).toBeLessThanOrEqual(high + 1e-9);
        }
        expect([along.anglesRad[0], along.speedsRadS[0]]).toEqual([
          expect.closeTo(list.at(-1) ?? 0, 9),
          expect.closeTo(0, 9),
        ]);
      }),
    );
  });

  it('has the speeds and accelerations that it says, at most', () => {
    fc.assert(
      fc.property(values, (list) => {
        let speed = 0;
        let accel = 0;
        for (const piece of pieces(sampled(list))) {
          speed = Math.max(speed, peakSpeed(piece, 0));
          accel = Math.max(accel, Math.abs(accelAt(piece, 0)));
        }
        const along = path(sampled(list), 1);
        const dt = 0.001;
        along.to(0);
        let before = { x: along.anglesRad[0] as number, v: along.speedsRadS[0] as number };
        let most = 0;
        for (let s = dt; along.to(s); s += dt) {
          const now = { x: along.anglesRad[0] as number, v: along.speedsRadS[0] as number };
          expect(Math.abs(now.v - before.v) / dt).toBeLessThanOrEqual(accel + 1e-6);
          // The mean of the speeds at either end, to the second order.
          expect((now.x - before.x) / dt).toBeCloseTo((now.v + before.v) / 2, 2);
          most = Math.max(most, Math.abs(now.v));
          before = now;
        }
        expect(most).toBeLessThanOrEqual(speed + 1e-9);
        expect(most).toBeGreaterThan(0.95 * speed - 1e-9);
      }),
    );
  });
});
