import { readFileSync } from 'node:fs';
import { afterAll, describe, expect, it } from 'vitest';
import { virtualClock } from '../../src/clock/virtual.ts';
import { capturesBeside } from '../../src/cli/fit.ts';
import { keeper } from '../../src/cli/fit-keeper.ts';
import { readCaptures } from '../../src/cli/fit-captures-csv.ts';
import { measure } from '../../src/cli/fit-session.ts';
import { fitCaptures } from '../../src/fit/fit.ts';
import { memoryPort } from '../../src/port/memory.ts';
import { loadRig } from '../../src/rig/load.ts';
import { countsOf, heldJoint, plantedServo, play, replies, sitting } from '../fit/workbench.ts';
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
    // It has lost its track where one of the poses for matching puts it.
    heldJoint(clock, 'base', { counts: (deg) => 2000 + 13 * deg, noise: 1.5, dead: [20.5, 23] }),
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
  const horns = [
    plantedServo('base', (us) => (us - 1500) / 10.5 + 3, { deadbandUs: 5, playUs: 10.5 }),
    // Mounted the other way round, and short of its nominal travel.
    plantedServo('elbow', (us) => -(us - 1500) / 11 - 2, { deadbandUs: 3, playUs: 0 }),
  ];
  const arm = memoryPort(clock, 'tcp:wren:1');
  let pulses = [Number.NaN, Number.NaN];
  let text = '';
  arm.far.listen({
    data(bytes) {
      text += new TextDecoder().decode(bytes);
      const lines = text.split('\n');
      text = lines.pop() ?? '';
      for (const line of lines) {
        pulses = line.split(',').map(Number);
        for (const [i, horn] of horns.entries()) horn.feed(pulses[i] as number);
      }
    },
  });
  const seat = sitting(clock, ({ address }) => (address.text === 'tcp:leader:1' ? hand.port : arm.port));
  return { clock, leader, hand, arm, horns, seat, pulses: () => pulses };
}

function load() {
  const loaded = loadRig(RIG);
  if ('mistakes' in loaded) throw new Error(JSON.stringify(loaded.mistakes));
  return loaded;
}

/** Types answers by what is asked; what no answer stands for ends the test. */
const typing =
  (answers: readonly (readonly [RegExp, string | (() => string | null)])[]) =>
  (ask: string): { text: string; untilUs: number } | null => {
    const found = answers.find(([asked]) => asked.test(ask));
    if (found === undefined) throw new Error(`nobody knows what to answer: ${ask}`);
    const text = typeof found[1] === 'string' ? found[1] : found[1]();
    return text === null ? null : { text, untilUs: 0 };
  };

/** Answers of a list, one after another. */
const inTurn = (...texts: readonly (string | null)[]): (() => string | null) => {
  const left = [...texts];
  return () => left.shift() ?? null;
};

describe('A session', () => {
  it('has its question stand again in the instant in which something else is said', async () => {
    const { clock, seat } = bench();
    const ending = measure(load(), [], null, { keep: () => {}, close: () => {} }, seat.table);
    const questions = new Set<string>();
    let said = 0;
    // The boards open, one answers at once, and the other is taken to be ready after 2.5 s.
    for (let ms = 1; ms <= 4_000; ms++) {
      clock.runTo(ms * 1000);
      const printed = seat.printed();
      if (printed.length === said) continue;
      said = printed.length;
      questions.add(printed.slice(printed.lastIndexOf('\n') + 1));
    }
    expect(seat.printed()).toContain('wren: ');
    expect([...questions].filter((question) => !/[:?] $/.test(question))).toEqual([]);
    seat.input.end();
    await expect(ending).resolves.toBe('interrupted');
  });

  it('takes a person through every step, and what it keeps gives back the planted truth', async () => {
    const { clock, leader, horns, seat } = bench();
    const loaded = load();
    const at = capturesBeside(RIG);
    const ending = measure(loaded, [], null, keeper(at), seat.table);
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
    expect(report.servos.map(({ travel }) => Math.round(travel?.travel_deg ?? 0))).toEqual([171, 164]);
    // They answer 6 us and 4 us, and not a microsecond less; the one has a degree of play, the other none.
    for (const [i, [deadbandUs, playDeg]] of [
      [5, 1],
      [3, 0],
    ].entries() as IterableIterator<[number, [number, number]]>) {
      const { deadband_us, backlash_deg } = report.servos[i] ?? {};
      expect(deadband_us).toEqual({ is: deadbandUs + 0.5, error_95: 0.5 });
      expect(Math.abs((backlash_deg?.is ?? Number.NaN) - playDeg)).toBeLessThan(backlash_deg?.error_95 ?? 0);
      expect(backlash_deg?.error_95).toBeLessThan(0.8);
    }
    expect(report.matches.map(({ direction }) => direction)).toEqual(['same', 'reversed']);
    expect(report.matches[0]?.gain.is).toBeCloseTo(0.7, 1);
    expect(report.matches[0]?.offset_deg.is).toBeCloseTo(5, 0);
    expect(seat.printed()).toContain('elbow turns against its points');
    expect(report.joints[0]?.sweep?.dead_spots_counts).toHaveLength(1);
    expect(seat.printed()).toContain('Not taken: it reads at the end of the converter');
  });

  it('keeps captures as they are made, and goes on from them after a crash', async () => {
    const at = files.path('crash.csv');
    const first = bench();
    first.leader[0]?.go(30, 0);
    const crashed = measure(load(), [], null, keeper(at), first.seat.table);
    // The crash: nobody answers any more, and nothing is closed.
    const typed = typing([
      [/or a number/, '10'],
      [/^Angle of base/, inTurn('30', '31', null)],
    ]);
    await expect(play(first.clock, first.seat, crashed, typed, 5)).rejects.toThrow('has not ended');
    const kept = readCaptures(readFileSync(at, 'utf8'));
    if ('mistakes' in kept) throw new Error(JSON.stringify(kept.mistakes));
    expect(kept.captures.map(({ knownDeg }) => knownDeg)).toEqual([30, 31]);

    const second = bench();
    second.leader[0]?.go(-40, 0);
    const again = measure(load(), kept.captures, null, keeper(at), second.seat.table);
    const more = typing([
      [/or a number/, inTurn('10', 'quit')],
      [/^Angle of base/, inTurn('-40', '')],
    ]);
    expect(await play(second.clock, second.seat, again, more, 20)).toBe('quit');
    expect(second.seat.printed()).toContain('2 captures of an earlier session are taken up.');
    expect(second.seat.printed()).toMatch(/points of stick +\+10 base/);
    const all = readCaptures(readFileSync(at, 'utf8'));
    if ('mistakes' in all) throw new Error(JSON.stringify(all.mistakes));
    // Done anew: a new attempt, which replaces the former one.
    expect(all.captures.map(({ knownDeg, attempt }) => [knownDeg, attempt])).toEqual([
      [30, 1],
      [31, 1],
      [-40, 2],
    ]);
  });

  it('refuses a hold that moves, with the reason, and takes it when it is still', async () => {
    const { clock, leader, seat } = bench();
    const at = files.path('moving.csv');
    const ended = measure(load(), [], null, keeper(at), seat.table);
    const typed = typing([
      [/or a number/, inTurn('10', 'quit')],
      [/^Angle of base/, inTurn('20', '20', '')],
    ]);
    leader[0]?.go(20, 3);
    expect(await play(clock, seat, ended, typed, 20)).toBe('quit');
    expect(seat.printed()).toContain('Not taken: it was still moving');
    expect(seat.printed()).toMatch(/Point 1: 22[56]\d\.\d counts at 20 deg/);
  });

  it('moves no servo before the arm is said to be safe', async () => {
    const { clock, seat, pulses } = bench();
    const ended = measure(load(), [], null, keeper(files.path('safe.csv')), seat.table);
    const typed = typing([
      [/or a number/, inTurn('1', 'quit')],
      [/^Type yes/, inTurn('no', '', 'list')],
    ]);
    expect(await play(clock, seat, ended, typed, 20)).toBe('quit');
    expect(pulses().every(Number.isNaN)).toBe(true);
    expect(seat.printed()).toContain('Take the horns off');
  });

  it('tells when a port vanishes halfway, leaves the step, and loses nothing', async () => {
    const { clock, seat, arm } = bench();
    const ended = measure(load(), [], null, keeper(files.path('vanish.csv')), seat.table);
    let angles = 0;
    const typed = typing([
      [/or a number/, inTurn('12', 'quit')],
      [/^Type yes/, 'yes'],
      [
        /^Angle at/,
        () => {
          if (++angles === 2) arm.far.unplug();
          return angles > 2 ? null : String(angles);
        },
      ],
    ]);
    expect(await play(clock, seat, ended, typed, 60)).toBe('quit');
    expect(seat.printed()).toContain('wren has lost its pulses. The step was left');
    expect(seat.printed()).toMatch(/wren: tcp wren:1 was closed/);
    const read = readCaptures(readFileSync(files.path('vanish.csv'), 'utf8'));
    expect('captures' in read && read.captures.length).toBeGreaterThan(0);
  });

  it('tells when the leader’s port vanishes halfway, leaves the step, and keeps what was captured', async () => {
    const { clock, seat, hand } = bench();
    const ended = measure(load(), [], null, keeper(files.path('silent.csv')), seat.table);
    let angles = 0;
    const typed = typing([
      [/or a number/, inTurn('10', 'quit')],
      [
        /^Angle of base/,
        () => {
          if (++angles === 2) hand.far.unplug();
          return '0';
        },
      ],
    ]);
    expect(await play(clock, seat, ended, typed, 60)).toBe('quit');
    expect(seat.printed()).toMatch(/stick: tcp leader:1 was closed/);
    expect(seat.printed()).toContain('stick sends no readings; look to its port. The step was left');
    const read = readCaptures(readFileSync(files.path('silent.csv'), 'utf8'));
    expect('captures' in read && read.captures.map(({ knownDeg }) => knownDeg)).toEqual([0]);
  });

  it('refuses a joint that never gets still, each time it is held', async () => {
    const { clock, leader, seat } = bench();
    const ended = measure(load(), [], null, keeper(files.path('restless.csv')), seat.table);
    for (let i = 0; i < 60; i++) leader[0]?.go(i % 2 === 0 ? 5 : -5, 0.1);
    const typed = typing([
      [/or a number/, inTurn('10', 'quit')],
      [/^Angle of base/, inTurn('0', '')],
    ]);
    expect(await play(clock, seat, ended, typed, 60)).toBe('quit');
    expect(seat.printed()).toMatch(/Not taken: it was (not still enough|still moving)/);
    expect(seat.printed()).toContain('No point was taken.');
  });

  it('ends as interrupted when its terminal goes, and moves nothing', async () => {
    const { clock, seat, pulses } = bench();
    const ended = measure(load(), [], null, keeper(files.path('gone.csv')), seat.table);
    let standing: number[] = [];
    const typed = typing([
      [/or a number/, '12'],
      [/^Type yes/, 'yes'],
      [
        /^Angle at (\d+)/,
        () => {
          if (pulses()[0] === 1500) return '0';
          standing = pulses();
          seat.input.end();
          return null;
        },
      ],
    ]);
    expect(await play(clock, seat, ended, typed, 60)).toBe('interrupted');
    expect(standing[0]).toBe(1600);
    expect(pulses()).toEqual(standing);
  });

  it('brings a servo home that was away when its operator leaves', async () => {
    const { clock, seat, pulses } = bench();
    const ended = measure(load(), [], null, keeper(files.path('home.csv')), seat.table);
    const typed = typing([
      [/or a number/, '12'],
      [/^Type yes/, 'yes'],
      [/^Angle at/, () => (pulses()[0] === 1500 ? '0' : 'quit')],
    ]);
    expect(await play(clock, seat, ended, typed, 60)).toBe('quit');
    expect(pulses()).toEqual([1500, 1500]);
  });
});
