import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { wakeMemory } from '../../src/bridge/wake-memory.ts';
import type { VirtualClock } from '../../src/clock/virtual.ts';
import type { CompiledBoard, CompiledRig } from '../../src/rig/compiled.ts';
import { type SimulatedBoard, simulatedBoard } from '../../src/sim/board.ts';
import { DEG, S } from '../plans.ts';
import { Performance, rigOf, rigYaml } from './performance.ts';

/** The same arm, waking as its profile says. */
const waking = (wake: 'ask' | 'rest' | 'last'): CompiledRig =>
  rigOf(rigYaml([['wren', 'sim:arm?seed=2']]).replace('wake: rest', `wake: ${wake}`));

/** A board whose arm stands somewhere else than at rest: somebody moved it, or the last run left it there. */
function standingAt(
  rig: CompiledRig,
  plan: CompiledBoard,
  clock: VirtualClock,
  anglesDeg: readonly number[],
): SimulatedBoard {
  if (plan.address.kind !== 'sim') throw new TypeError('not simulated');
  const arms = plan.followers.map((f) => ({
    name: 'wren',
    servos: (rig.plan.followers[f]?.servos ?? []).map(({ map, turns }, k) => {
      const angle = (anglesDeg[k] as number) * DEG;
      return { map, turns, startRad: angle, sagRad: angle };
    }),
  }));
  return simulatedBoard({ clock, address: plan.address, wire: plan.wire, plan: plan.plan, hand: null, arms });
}

/** A run whose arm stands at the given angles when its board starts. */
class Morning extends Performance {
  readonly arm: SimulatedBoard['arms'][number];

  constructor(
    rig: CompiledRig,
    anglesDeg: readonly number[],
    options: ConstructorParameters<typeof Performance>[1] = {},
  ) {
    const boards: SimulatedBoard[] = [];
    super(rig, {
      ...options,
      boardFor: (plan, clock) => {
        if (plan.followers.length === 0) return null;
        const made = standingAt(rig, plan, clock, anglesDeg);
        boards.push(made);
        return made;
      },
    });
    const arm = boards[0]?.arms[0];
    if (arm === undefined) throw new Error('no arm');
    this.arm = arm;
  }

  /** Fastest that any servo's horn has turned, deg/s. */
  get fastestDegS(): number {
    return Math.max(this.arm.speedMaxRadS(0), this.arm.speedMaxRadS(1)) / DEG;
  }
}

/** A hobby servo runs to its first pulse at about 300 deg/s (0.2 s for 60 degrees; common practice, no source). */
const SLAM_DEG_S = 300;

describe('the first pulse', () => {
  let folder: string;
  beforeEach(() => void (folder = mkdtempSync(join(tmpdir(), 'slam-'))));
  afterEach(() => rmSync(folder, { recursive: true, force: true }));

  it('slams an arm that stands elsewhere than its wake pose says, if nobody confirms it', () => {
    const on = new Morning(waking('rest'), [60, -40]).run(1.5 * S);
    expect(on.fastestDegS).toBeGreaterThan(0.9 * SLAM_DEG_S);
  });

  it('never comes before the go where the pose is to be confirmed, so that the arm can be put there', () => {
    const on = new Morning(waking('ask'), [60, -40], { unasked: false }).run(5 * S);
    expect(on.states()).toEqual(['waking']);
    expect(on.fastestDegS).toBe(0);
    expect(on.arm.pulseUs(0)).toBeNaN();
  });

  it('moves nothing where the arm stands at the pose that was confirmed', () => {
    const on = new Morning(waking('ask'), [0, 0], { unasked: false }).run(2 * S);
    on.live.key('hold');
    on.live.key('go');
    on.run(0.5 * S);
    expect(on.states()).not.toEqual(['waking']);
    expect(on.fastestDegS).toBeLessThan(1);
  });

  it('moves nothing where the last run left the arm and remembered it', () => {
    const file = join(folder, 'wake.json');
    const forget = (): void => expect.unreachable();
    const rig = waking('last');
    const evening = new Morning(rig, [0, 0], { memory: wakeMemory(file, forget) }).run(6 * S);
    evening.live.key('hold');
    evening.run(2 * S);
    void evening.live.close();
    const left = [0, 1].map((k) => evening.arm.angleRad(k) / DEG);
    expect(Math.max(...left.map(Math.abs))).toBeGreaterThan(10);

    const morning = new Morning(rig, left, { memory: wakeMemory(file, forget) });
    while (morning.states()[0] !== 'joining') morning.run(0.01 * S);
    morning.live.key('hold');
    morning.run(S);
    expect(morning.fastestDegS).toBeLessThan(0.1 * SLAM_DEG_S);
    const forgetful = new Morning(rig, left).run(1.5 * S);
    expect(forgetful.fastestDegS).toBeGreaterThan(0.9 * SLAM_DEG_S);
  });

  it('is followed by nothing faster than the profile allows', () => {
    const on = new Morning(waking('rest'), [0, 0]).run(1.5 * S);
    on.arm.forgetSpeed();
    on.run(12 * S);
    expect(on.states()).toEqual(['following']);
    // By hand: 60 deg/s, and a servo that catches up on its 1 degree of play and 4 us of deadband within one refresh.
    expect(on.fastestDegS).toBeLessThan(60 + (1 + (4 * 180) / 1880) / 0.02);
    expect(on.fastestDegS).toBeGreaterThan(5);
  });
});
