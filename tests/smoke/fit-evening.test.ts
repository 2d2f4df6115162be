import { spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as pause } from 'node:timers/promises';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Clock } from '../../src/clock/clock.ts';
import type { FitReport } from '../../src/fit/report.ts';
import { countsOf, heldJoint, plantedServo, replies } from '../fit/workbench.ts';
import { pluggedPty, type Pty } from '../port/pty.ts';
import { linesOf, type Screen, screen } from './screen.ts';

/**
 * `eidograph fit RIG` as a person starts it: a real terminal, the real serial binding, and two boards on pseudo-terminals whose
 * pot and servo are planted. The person is a script that reads the screen and types; nothing is hurried.
 */

/** 13 counts a degree at its middle, bent by 1.2 % of the converter's range, 1.5 counts of noise, no track at 35 to 40. */
const POT = {
  counts: (deg: number) => 2048 + 13 * deg + 49 * (1 - (deg / 130) ** 2),
  noise: 1.5,
  dead: [35, 40] as const,
};
/** Turns against its points, 82.5 degrees over 1050 to 1950 us rather than 90, and stands off by 3. */
const hornDeg = (us: number): number => 3 - ((us - 1500) * 110) / 1200;
const SERVO = { deadbandUs: 1, playUs: 4 };
/** follower = -0.3 leader + 2 */
const ALIKE = { gain: -0.3, offset: 2 };

const READING_MS = 10;
const LOOK_MS = 25;
const PATIENCE_US = 20_000_000;
/** A quarter of an hour of a machine that is busy with much else; a minute and a half of one that is not. */
const EVENING_MS = 900_000;

const folder = mkdtempSync(join(tmpdir(), 'eidograph-evening-'));
const path = (name: string): string => join(folder, name);
const PROGRAM = ['--import', 'tsx', 'src/cli/main.ts'];

const rigText = (leaderPort: string, armPort: string): string => `rig: bench
leader:
  leader: stick
  port: serial:${leaderPort}?baud=115200
  wire: lines
  counts: [0, 4095]
  joints:
    - { name: base, channel: 0, points: [[300, -120], [3700, 120]] }   # a first guess
followers:
  - follower: wren
    port: serial:${armPort}?baud=115200
    wire: { lines: { template: "{base.us}\\n" } }
    wake: ask
    joints:
      - { name: base, from: base, range_deg: [-34, 38], speed_deg_s: 90, accel_deg_s2: 360, servo: { channel: 0, points: [[-45, 1050], [45, 1950]] } }
`;

describe('An evening at a real terminal', () => {
  /** The hand's time goes on with each reading: however late a busy machine sends one, it is the next. */
  let readings = 0;
  const hand = { nowUs: () => readings * READING_MS * 1000 };
  let leader: Pty;
  let arm: Pty;
  let talking: NodeJS.Timeout;
  let shown = '';

  beforeAll(async () => {
    leader = await pluggedPty();
    arm = await pluggedPty();
    writeFileSync(path('bench.yaml'), rigText(leader.path, arm.path));
    const base = heldJoint(hand, 'base', POT);
    const horn = plantedServo('base', hornDeg, SERVO);
    let fed = 0;
    talking = setInterval(() => {
      leader.child()?.stdin?.write(`${Math.round(countsOf(base, hand.nowUs(), 0))}\r\n`);
      readings++;
      const lines = arm.received().toString().split('\n').slice(0, -1);
      for (const line of lines.slice(fed)) horn.feed(Number(line));
      fed = lines.length;
    }, READING_MS);
    const answer = replies(
      {
        leader: [base],
        horns: [horn],
        alike: (_, deg) => ({ source: base, deg: (deg - ALIKE.offset) / ALIKE.gain }),
        anglesDeg: [-120, -95, -70, -45, -20, 0, 20, 55, 75, 100, 120],
        errorDeg: 0.3,
        seed: 5,
      },
      { stopsDeg: [-125, 125], sweepS: 2 },
    );
    const at = screen(
      `${process.execPath} ${PROGRAM.join(' ')} fit ${path('bench.yaml')} --json --report ${path('report.html')} >${path('fit.json')}; echo status $?`,
    );
    try {
      shown = await sat(at, answer, hand);
    } finally {
      at.close();
    }
  }, EVENING_MS);

  afterAll(async () => {
    clearInterval(talking);
    await leader.dispose();
    await arm.dispose();
    rmSync(folder, { recursive: true, force: true });
  });

  it('is gone through to the end, and every figure is written down', () => {
    expect(shown).toContain('status 0');
    expect(shown).toContain('the old file is');
    const report = JSON.parse(readFileSync(path('fit.json'), 'utf8')) as FitReport;
    expect(report.problems).toEqual([]);
    expect(readFileSync(path('report.html'), 'utf8')).toMatch(/^<!doctype html>/);
    const [base] = report.joints;
    expect(base?.points?.curve).toBe('monotone');
    expect(base?.sweep?.dead_spots_counts).toHaveLength(1);
    const [from, to] = base?.sweep?.dead_spots_counts[0] ?? [0, 0];
    // 250 degrees in 2 s are 16 counts a reading.
    expect(Math.abs(from - POT.counts(35))).toBeLessThan(25);
    expect(Math.abs(to - POT.counts(40))).toBeLessThan(25);
    expect(report.servos[0]?.travel?.travel_deg).toBeCloseTo(82.5, -0.5);
    expect(report.servos[0]?.deadband_us).toEqual({ is: SERVO.deadbandUs + 0.5, error_95: 0.5 });
    expect(report.matches[0]?.direction).toBe('reversed');
  });

  it('gives a rig that puts the follower within a degree of the truth everywhere in range', () => {
    expect(readFileSync(path('bench.yaml'), 'utf8')).toMatch(/points: \[\[.*\]\].*fitted: \{.*# a first guess/);
    const held = [-115, -90, -60, -30, 0, 30, 60, 90, 115];
    const seconds = 4;
    const rows = held.flatMap((deg, i) =>
      Array.from({ length: seconds * 20 }, (_, k) => `${(i * seconds * 20 + k) * 50},${Math.round(POT.counts(deg))}`),
    );
    writeFileSync(path('readings.csv'), `t_ms,base\n${rows.join('\n')}\n`);
    const traced = spawnSync(
      process.execPath,
      [...PROGRAM, 'trace', path('bench.yaml'), '--in', path('readings.csv')],
      { encoding: 'utf8' },
    );
    expect(traced.stderr).toBe('');
    const commands = traced.stdout
      .trim()
      .split('\n')
      .slice(1)
      .map((line) => line.split(','));
    const worst = held.map((deg, i) => {
      const last = commands.findLast(([tMs]) => Number(tMs) < (i + 1) * seconds * 1000);
      return Math.abs(hornDeg(Number(last?.[6])) - (ALIKE.gain * deg + ALIKE.offset));
    });
    expect(Math.max(...worst)).toBeLessThan(1);
  });
});

/** Before a question stands the tape of a sweep. */
const TAPE = /^\|[-#o]+\| (?:\d+|no reading) {2}/;

/** Reads the screen and types until the program has ended; returns what was on it. */
async function sat(at: Screen, answer: ReturnType<typeof replies>, hand: Pick<Clock, 'nowUs'>): Promise<string> {
  const endUs = hand.nowUs() + EVENING_MS * 1000;
  let looked = '';
  let typed: string | null = null;
  let typedUs = 0;
  let from = 0;
  for (;;) {
    await pause(LOOK_MS);
    const text = at.shown();
    if (hand.nowUs() > endUs) throw new Error(`the evening has not ended:\n${text.slice(-2000)}`);
    // Only what has come to rest is read: half a line is no question.
    const rests = text === looked;
    looked = text;
    if (!rests) continue;
    const lines = linesOf(text).map((line) => line.replace(TAPE, ''));
    if (/^status \d/.test(lines.at(-2) ?? '')) return lines.join('\n');
    if (typed !== null) {
      // A notice may come between: only a line that was entered counts.
      const entered = lines.findIndex((line, i) => i >= from && i < lines.length - 1 && line === typed);
      // A question that stands so long waits for an answer, wherever the last one went.
      if (entered < 0 && hand.nowUs() - typedUs < PATIENCE_US) continue;
      from = entered + 1;
      typed = null;
    }
    const ask = lines.at(-1) ?? '';
    if (!/[:?] $/.test(ask)) continue;
    const reply = answer(ask, lines.join('\n'));
    while (hand.nowUs() < reply.untilUs) await pause(LOOK_MS);
    typed = ask + reply.text;
    typedUs = hand.nowUs();
    from = lines.length - 1;
    at.type(`${reply.text}\r`);
  }
}
