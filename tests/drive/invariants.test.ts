import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { drive } from '../../src/drive/drive.ts';
import { DEG, followerSpec, MS, planOf, S } from '../plans.ts';
import { take } from './fold.ts';
import { driveFaults, type Record } from './laws.ts';
import { randomStaging, type Staging } from './random-plans.ts';
import { play, randomScenes } from './random-scenes.ts';
import { Rehearsal, type Told } from './rehearsal.ts';

const LONG_MS = 60_000;

/** Random readings, keys and faults on random rigs: one simulated rehearsal of some seconds each. */
describe('whatever happens to whatever rig', () => {
  it(
    'no command breaks a law: range, points, speed, acceleration, stop, stale readings, rate',
    () => {
      const seen = { commands: 0, moving: 0 };
      fc.assert(
        fc.property(randomStaging, randomScenes, (staging, scenes) => {
          const on = play(staging, scenes);
          seen.commands += on.told.length;
          seen.moving += on.told.filter((told) => told.moving).length;
          expect(driveFaults(recordOf(staging, on))).toEqual([]);
        }),
        { numRuns: 200 },
      );
      // A law that no arm moves under proves nothing.
      expect(seen.moving).toBeGreaterThan(0.1 * seen.commands);
    },
    LONG_MS,
  );

  it(
    'the same plan, start poses and events give the same commands, bit for bit',
    () => {
      fc.assert(
        fc.property(randomStaging, randomScenes, (staging, scenes) => {
          const on = play(staging, scenes);
          const again = drive(staging.plan, staging.starts, 0);
          const bytes: string[] = [];
          for (const { event } of on.happened) {
            take(again, event, ({ index, is, kind, arm }) =>
              bytes.push(line(event.tUs, index, kind, is.state, arm.governor.x)),
            );
          }
          expect(bytes).toEqual(linesOf(on));
        }),
        { numRuns: 40 },
      );
    },
    LONG_MS,
  );
});

/** The laws themselves: a lawful record of one arm, spoilt in one place. */
describe('the laws of a drive catch', () => {
  const plan = planOf([followerSpec()]);
  const swing = (tS: number): number[] => [40 * Math.sin(2 * tS), 30 * Math.sin(3 * tS)];
  const staging: Staging = { plan, starts: [{ poseRad: null, unasked: true, awake: false, board: 0 }], busyUs: 0 };
  const rehearse = (): Rehearsal => new Rehearsal(plan).following().plays(2 * S, swing);

  /** Faults of a lawful record in which one command, counted from the end, has been changed. */
  const spoilt = (on: Rehearsal, fromEnd: number, change: (told: Told) => Partial<Told>): string[] => {
    const record = recordOf(staging, on);
    expect(driveFaults(record)).toEqual([]);
    const at = on.told.length - fromEnd;
    return driveFaults({ ...record, told: on.told.map((told, i) => (i === at ? { ...told, ...change(told) } : told)) });
  };
  const turned = (told: Told, byDeg: number): Partial<Told> => ({
    anglesRad: told.anglesRad.map((rad) => rad + byDeg * DEG),
  });

  it('a step that is too hard', () => {
    expect(spoilt(rehearse(), 10, (told) => turned(told, 0.2)).some((fault) => fault.includes('too hard'))).toBe(true);
  });

  it('an angle out of range, and none at all', () => {
    expect(spoilt(rehearse(), 10, (told) => turned(told, 120)).some((fault) => fault.includes('out of range'))).toBe(
      true,
    );
    expect(spoilt(rehearse(), 10, (told) => turned(told, Number.NaN)).some((fault) => fault.includes('no angle'))).toBe(
      true,
    );
  });

  it('a pulse beyond the points, and none at all', () => {
    for (const pulse of [2441, Number.NaN])
      expect(spoilt(rehearse(), 10, () => ({ pulsesUs: Float64Array.of(pulse, 1500) }))).toEqual([
        expect.stringContaining('servo 0'),
      ]);
  });

  it('a command too soon', () => {
    const faults = spoilt(rehearse(), 10, (told) => ({ tUs: told.tUs - 19 * MS }));
    expect(faults.some((fault) => fault.includes('told after'))).toBe(true);
  });

  it('an arm that moves on without readings', () => {
    const on = rehearse().run(S);
    const faults = spoilt(on, 1, (told) => turned(told, 0.05));
    expect(faults.some((fault) => fault.includes('readings too old'))).toBe(true);
  });

  it('an arm that moves while it is stopped', () => {
    const on = rehearse().key('stop').plays(S, swing);
    expect(spoilt(on, 1, (told) => turned(told, 0.01)).some((fault) => fault.includes('while it was stopped'))).toBe(
      true,
    );
    const left = recordOf(staging, on);
    const happened = left.happened.map((each, i) =>
      i === left.happened.length - 1 ? { ...each, states: ['joining' as const] } : each,
    );
    expect(driveFaults({ ...left, happened })).toEqual([expect.stringContaining('left its stop')]);
  });

  it('a moving arm that is kept waiting', () => {
    const on = rehearse();
    const record = recordOf(staging, on);
    const last = record.happened.at(-1) as (typeof record.happened)[number];
    const late = { ...last, event: { kind: 'tick' as const, tUs: last.event.tUs + 25 * MS } };
    expect(driveFaults({ ...record, happened: [...record.happened, late] })).toEqual([
      expect.stringContaining('kept waiting'),
    ]);
  });
});

function recordOf({ plan, starts, busyUs }: Staging, { happened, told }: Rehearsal): Record {
  return { plan, boardOf: starts.map((start) => start.board), busyUs, happened, told };
}

function line(tUs: number, follower: number, kind: string, state: string, angles: Float64Array): string {
  return `${tUs} ${follower} ${kind} ${state} ${Buffer.from(angles.slice().buffer).toString('hex')}`;
}

function linesOf(on: Rehearsal): string[] {
  return on.told.map((told) => line(told.tUs, told.follower, told.kind, told.state, told.anglesRad));
}
