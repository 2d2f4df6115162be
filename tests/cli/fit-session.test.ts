import { existsSync, readFileSync } from 'node:fs';
import { afterAll, describe, expect, it } from 'vitest';
import { virtualClock } from '../../src/clock/virtual.ts';
import { capturesBeside } from '../../src/cli/fit.ts';
import { keeper } from '../../src/cli/fit-keeper.ts';
import { readCaptures } from '../../src/cli/fit-captures-csv.ts';
import { measure } from '../../src/cli/fit-session.ts';
import { fitCaptures } from '../../src/fit/fit.ts';
import { memoryPort } from '../../src/port/memory.ts';
import { loadRig } from '../../src/rig/load.ts';
import { countsOf, heldJoint, type Horn, play, replies, sitting } from '../fit/workbench.ts';
import { scratch } from './rigs.ts';

const files = scratch();
afterAll(() => files.remove());

const RIG = files.write(
  'bench.yaml',
  `rig: bench
leader: { leader: stick, port: "tcp:leader:1", wire: lines, counts: [0, 4095],
  joints: [{ name: base, channel: 0, points: [[400, -100], [3700, 100]] }, { name: elbow, channel: 1, points: [[400, -100], [3700, 100]] }] }
followers:
  - follower: wren
    port: "tcp:wren:1"
    wire: { lines: { template: "{base.us},{elbow.us}\\n" } }
    wake: ask
    joints:
      - { name: base, from: base, range_deg: [-60, 60], speed_deg_s: 60, accel_deg_s2: 240, servo: { channel: 0, points: [[-90, 600], [90, 2400]] } }
      - { name: elbow, from: elbow, range_deg: [-60, 60], speed_deg_s: 60, accel_deg_s2: 240, servo: { channel: 1, points: [[-90, 600], [90, 2400]] } }
`,
);

/** Two boards that print and read lines: the leader's two pots every 10 ms, and the follower's two servos. */
function bench() {
  const clock = virtualClock();
  const leader = [
    heldJoint(clock, 'base', { counts: (deg) => 2000 + 13 * deg, noise: 1.5, dead: null }),
    // Falls as the angle rises.
    heldJoint(clock, 'elbow', { counts: (deg) => 2100 - 12 * deg, noise: 1.5, dead: null }),
  ];
  const hand = memoryPort(clock, 'tcp:leader:1');
  const tick = (): void => {
    const line = leader.map((joint, i) => Math.round(countsOf(joint, clock.nowUs(), i))).join(',');
    hand.far.write(new TextEncoder().encode(`${line}\n`));
    clock.at(clock.nowUs() + 10_000, tick);
  };
  clock.at(10_000, tick);
  const arm = memoryPort(clock, 'tcp:wren:1');
  let pulses = [Number.NaN, Number.NaN];
  let text = '';
  arm.far.listen({
    data(bytes) {
      text += new TextDecoder().decode(bytes);
      const lines = text.split('\n');
      text = lines.pop() ?? '';
      const last = lines.at(-1);
      if (last !== undefined) pulses = last.split(',').map(Number);
    },
  });
  const horns: Horn[] = [
    { joint: 'base', deg: (us) => (us - 1500) / 10.5 + 3, pulseUs: () => pulses[0] as number },
    // Mounted the other way round, and short of its nominal travel.
    { joint: 'elbow', deg: (us) => -(us - 1500) / 11 - 2, pulseUs: () => pulses[1] as number },
  ];
  const seat = sitting(clock, ({ address }) => (address.text === 'tcp:leader:1' ? hand.port : arm.port));
  return { clock, leader, hand, arm, horns, seat, pulses: () => pulses };
}

function load() {
  const loaded = loadRig(RIG);
  if ('mistakes' in loaded) throw new Error(JSON.stringify(loaded.mistakes));
  return loaded;
}

describe('A session', () => {
  it('takes a person through every step, and what it keeps gives back the planted truth', async () => {
    const { clock, leader, horns, seat } = bench();
    const loaded = load();
    const at = capturesBeside(RIG);
    const ending = measure(loaded, [], keeper(at), seat.table);
    const person = {
      leader,
      horns,
      // follower = 0.7 leader + 5, and -0.6 leader for the elbow.
      alike: (joint: string, deg: number) =>
        joint === 'base' ? { source: leader[0]!, deg: (deg - 5) / 0.7 } : { source: leader[1]!, deg: deg / -0.6 },
      anglesDeg: [-120, -90, -60, -30, 0, 30, 60, 90, 120],
      errorDeg: 0.5,
      seed: 3,
    };
    const answer = replies(person, { stopsDeg: [-125, 125], sweepS: 4 });
    expect(await play(clock, seat, ending, answer, 900)).toBe('fit');
    const read = readCaptures(readFileSync(at, 'utf8'));
    if ('mistakes' in read) throw new Error(JSON.stringify(read.mistakes));
    const report = fitCaptures(loaded.profiles, read.captures, {
      rig: 'bench',
      date: '2026-12-01',
      wish: { jitterM: 1, lagS: 1 },
    });
    expect(report.problems).toEqual([]);
    const [base, elbow] = report.joints;
    expect(base?.points?.slope_deg_per_unit.is).toBeCloseTo(1 / 13, 3);
    expect(elbow?.points?.slope_deg_per_unit.is).toBeCloseTo(-1 / 12, 3);
    expect(base?.sweep?.span_counts[0]).toBeCloseTo(2000 - 13 * 125, -1);
    expect(base?.sweep?.ends_confirmed).toBe(true);
    expect(base?.sweep?.hysteresis_seen).toBe(false);
    expect(report.servos.map(({ travel_deg }) => Math.round(travel_deg))).toEqual([171, 164]);
    expect(report.matches.map(({ direction }) => direction)).toEqual(['same', 'reversed']);
    expect(report.matches[0]?.gain.is).toBeCloseTo(0.7, 1);
    expect(report.matches[0]?.offset_deg.is).toBeCloseTo(5, 0);
    expect(seat.printed()).toContain('elbow turns against its points');
  });
});
