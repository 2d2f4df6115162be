import { mkdtempSync, readFileSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { virtualClock } from '../../src/clock/virtual.ts';
import { fitMeasured } from '../../src/cli/fit.ts';
import { filesOnDisk } from '../../src/cli/fit-files.ts';
import type { FitReport } from '../../src/fit/report.ts';
import { countsOf, heldJoint, type Horn, plantedServo, play, replies, sitting } from '../fit/workbench.ts';
import { median } from './solo.ts';
import { calm, trainOf, widthsOf } from './trains.ts';
import { troupe } from './troupe.ts';
import { wiredBoard } from './wired.ts';

/**
 * The planted truth. The base's pot has 3.2 counts a degree at its middle, bends by 1.2 % of the converter's range over
 * its travel, trembles by 0.8 counts, and has lost its track between 35 and 40 degrees. The elbow's runs the other way.
 */
const BASE = {
  counts: (deg: number) => 511.5 + 3.2 * deg + 12 * (1 - (deg / 130) ** 2),
  countsPerDeg: 3.2,
  noise: 0.8,
  dead: [35, 40] as const,
};
const ELBOW = { counts: (deg: number) => 530 - 3.5 * deg, countsPerDeg: 3.5, noise: 0.6, dead: null };
/** The servo turns against its points, and 168 degrees over 600 to 2400 us rather than 180, off by 4. */
const hornDeg = (us: number): number => 4 - ((us - 1500) * 168) / 1800;
/** It answers 6 us and not less, and its horn has a degree of play. */
const DEADBAND_US = 5;
const PLAY_DEG = 1;
/** follower = -0.5 leader + 6 */
const ALIKE = { gain: -0.5, offset: 6 };

const RIG = `# One board for both, as on a first evening.
rig: bench
leader: leader.yaml      # the stick
followers: [wren.yaml]
`;
const LEADER = `leader: stick
port: serial:/dev/ttyACM0
wire: firmata
counts: [0, 1023]        # 10 bits
joints:
  - name: base
    channel: 1           # wrong: it is on A0
    points: [[100, -100], [900, 100]]     # a first guess
  - name: elbow
    channel: 0
    points: [[100, -100], [900, 100]]
`;
const WREN = `follower: wren
port: serial:/dev/ttyACM0
wire: firmata
wake: ask
joints:
  - name: base
    from: base
    range_deg: [-55, 65]
    speed_deg_s: 90
    accel_deg_s2: 360
    servo: { channel: 9, points: [[-90, 600], [90, 2400]] }    # data sheet
`;

const folder = mkdtempSync(join(tmpdir(), 'eidograph-fit-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));
const path = (name: string): string => join(folder, name);

/** A quarter of an hour of two cores that are shared with much else; two minutes of quiet ones. */
const EVENING_MS = 900_000;

/** Whole pulses are read from the pin; one late interrupt does not matter to a horn. */
const lastPulse = (widths: readonly number[]): number => Math.round(median(widths.slice(-5)));

describe('An evening with a new arm, on real firmware', () => {
  let report: FitReport;
  let printed = '';
  let status = -1;

  beforeAll(async () => {
    writeFileSync(path('bench.yaml'), RIG);
    writeFileSync(path('leader.yaml'), LEADER);
    writeFileSync(path('wren.yaml'), WREN);
    const clock = virtualClock();
    const wired = wiredBoard(clock, 'serial:/dev/ttyACM0');
    const leader = [heldJoint(clock, 'base', BASE), heldJoint(clock, 'elbow', ELBOW)];
    leader.forEach((joint, channel) =>
      wired.board.setVolts(channel, (atUs) => ((countsOf(joint, atUs, channel) + 0.5) * 5) / 1024),
    );
    const servo = plantedServo('base', hornDeg, {
      deadbandUs: DEADBAND_US,
      playUs: PLAY_DEG / Math.abs(hornDeg(1) - hornDeg(0)),
    });
    let fedUs = 0;
    /** All that has been on its pin since it was last looked at. */
    const fed = (): typeof servo => {
      const train = trainOf(wired.board, 9, fedUs - 60_000);
      for (const { startUs, widthUs } of calm(train)) if (startUs >= fedUs) servo.feed(Math.round(widthUs));
      fedUs = train.at(-1)?.startUs ?? fedUs;
      return servo;
    };
    const horns: Horn[] = [{ ...servo, pulseUs: () => fed().pulseUs(), standsDeg: () => fed().standsDeg() }];
    const person = {
      leader,
      horns,
      alike: (_: string, deg: number) => ({
        source: leader[0] as (typeof leader)[number],
        deg: (deg - ALIKE.offset) / ALIKE.gain,
      }),
      anglesDeg: [-120, -100, -80, -60, -40, -20, 0, 20, 60, 80, 100, 120],
      errorDeg: 0.3,
      seed: 5,
    };
    const seat = sitting(clock, () => wired.port);
    const out: string[] = [];
    const said: string[] = [];
    const session = fitMeasured(
      path('bench.yaml'),
      {
        json: true,
        dryRun: false,
        partly: false,
        report: path('report.html'),
        smooth: false,
        wish: { jitterM: 0.0005, lagS: 0.06 },
        captures: undefined,
      },
      () => seat.table,
      filesOnDisk(() => ({ date: '2026-12-01', time: '20-15-00' })),
      { out: (text) => out.push(text), err: (text) => said.push(text) },
    );
    const done = session.then((code) => {
      status = code;
      return 'fit' as const;
    });
    await play(clock, seat, done, replies(person, { stopsDeg: [-130, 130], sweepS: 2.5 }), 900);
    printed = seat.printed() + said.join('');
    report = JSON.parse(out.join('')) as FitReport;
  }, EVENING_MS);

  it('is gone through to the end, with every joint fitted', () => {
    expect(printed).toContain('the old file is');
    expect(status).toBe(0);
    expect(report.problems).toEqual([]);
  });

  it('finds the joint on another channel than the profile says, and mends that', () => {
    expect(printed).toContain('base is on channel 0, which the profile gives to elbow');
    expect(report.joints.map(({ joint, channel }) => [joint, channel])).toEqual([
      ['base', 0],
      ['elbow', 1],
    ]);
  });

  it('finds the dead spot, where it is, and no other', () => {
    const [base, elbow] = report.joints;
    expect(base?.sweep?.dead_spots_counts).toHaveLength(1);
    const [from, to] = base?.sweep?.dead_spots_counts[0] ?? [0, 0];
    expect(Math.abs(from - BASE.counts(35))).toBeLessThan(6);
    expect(Math.abs(to - BASE.counts(40))).toBeLessThan(6);
    expect(elbow?.sweep?.dead_spots_counts).toEqual([]);
  });

  it('measures the noise: what was planted and what counting whole steps adds', () => {
    // Root of the sum of squares of 0.8 (0.6) and 1 / sqrt(12); two hundred readings tell it to a twentieth.
    for (const [i, planted] of [BASE.noise, ELBOW.noise].entries()) {
      const noise = report.joints[i]?.still?.noise_counts ?? Number.NaN;
      expect(Math.abs(noise / Math.hypot(planted, 1 / Math.sqrt(12)) - 1)).toBeLessThan(0.15);
    }
  });

  it('finds the bend of the one pot, and maps both about within their stated error', () => {
    const [base, elbow] = report.joints;
    expect(base?.points?.curve).toBe('monotone');
    for (const [joint, pot] of [
      [base, BASE],
      [elbow, ELBOW],
    ] as const) {
      const error = joint?.points?.error_95_deg ?? Number.NaN;
      expect(error).toBeLessThan(1);
      expect(joint?.points?.wrong).toBeNull();
      for (const { x, known_deg, residual_deg } of joint?.points?.measured ?? []) {
        // The map at x, against the angle at which the pot truly reads x.
        const map = known_deg - residual_deg;
        // One evening in twenty is beyond it, and how many are is counted elsewhere: half as much again is beyond none.
        expect(Math.abs(pot.counts(map) - x) / pot.countsPerDeg).toBeLessThan(1.5 * error);
      }
    }
  });

  it('measures the servo’s true travel, and that it turns against its points', () => {
    const [base] = report.servos;
    // Its play hangs back at both ends: between 167 and 168 degrees are right, and readings are half degrees.
    expect(Math.abs((base?.travel?.travel_deg ?? 0) - 167.5)).toBeLessThan(0.8);
    expect(base?.travel?.points.slope_deg_per_unit.is).toBeLessThan(0);
    expect(printed).toContain('base turns against its points');
  });

  it('tells its deadband and its backlash apart', () => {
    const { deadband_us, backlash_deg } = report.servos[0] ?? {};
    expect(Math.abs((deadband_us?.is ?? Number.NaN) - DEADBAND_US)).toBeLessThanOrEqual(
      (deadband_us?.error_95 ?? 0) + 0.01,
    );
    expect(deadband_us?.error_95).toBeLessThan(2);
    expect(Math.abs((backlash_deg?.is ?? Number.NaN) - PLAY_DEG)).toBeLessThan(backlash_deg?.error_95 ?? 0);
    expect(backlash_deg?.error_95).toBeLessThan(1);
  });

  it('matches the follower to the leader, and says that it turns the other way', () => {
    const [base] = report.matches;
    expect(base?.gain.is).toBeCloseTo(0.5, 1);
    expect(Math.abs((base?.gain.is ?? 0) - 0.5)).toBeLessThan(base?.gain.error_95 ?? 0);
    expect(Math.abs((base?.offset_deg.is ?? 0) - 6)).toBeLessThan(base?.offset_deg.error_95 ?? 0);
    expect(base?.direction).toBe('reversed');
    expect(printed).toContain('turns the other way round than the profile says');
  });

  it('writes only fitted values, keeps comments and order, and keeps the old files', () => {
    expect(readdirSync(folder).sort()).toEqual([
      'bench.captures.csv',
      'bench.yaml',
      'leader.yaml',
      'leader.yaml.2026-12-01T20-15-00',
      'report.html',
      'wren.yaml',
      'wren.yaml.2026-12-01T20-15-00',
    ]);
    expect(readFileSync(path('bench.yaml'), 'utf8')).toBe(RIG);
    expect(readFileSync(path('leader.yaml.2026-12-01T20-15-00'), 'utf8')).toBe(LEADER);
    const leader = readFileSync(path('leader.yaml'), 'utf8');
    expect(leader).toContain('counts: [0, 1023]        # 10 bits\n');
    expect(leader).toMatch(/channel: 0 +# wrong: it is on A0\n/);
    expect(leader).toMatch(/points: \[\[.*\]\] +# a first guess\n/);
    expect(leader).toMatch(
      /fitted: \{ date: "2026-12-01", method: monotone, residual_deg: [\d.]+, error_deg: [\d.]+, points: 12 \}/,
    );
    const wren = readFileSync(path('wren.yaml'), 'utf8');
    expect(wren).toMatch(/ # data sheet\n/);
    expect(wren).toContain('range_deg: [-55, 65]\n');
  });

  it('gives a rig that puts the follower within a degree of the truth everywhere in range', () => {
    const driven = troupe({ onDisk: path('bench.yaml') });
    const board = driven.at('serial:/dev/ttyACM0').board;
    const volts = (counts: number): number => ((counts + 0.5) * 5) / 1024;
    const pose = (base: number, elbow: number): void => {
      board.setVolts(0, volts(BASE.counts(base)));
      board.setVolts(1, volts(ELBOW.counts(elbow)));
    };
    pose(0, 0);
    driven.until('the board has answered', 10e6, () => driven.state('wren') === 'waking');
    driven.key('go');
    driven.until('it follows', 20e6, () => driven.state('wren') === 'following');
    let worst = 0;
    for (const deg of [-115, -80, -40, 0, 30, 45, 80, 118]) {
      pose(deg, 0);
      driven.wait(2_500_000);
      const pulse = lastPulse(widthsOf(trainOf(board, 9, driven.clock.nowUs() - 200_000)));
      worst = Math.max(worst, Math.abs(hornDeg(pulse) - (ALIKE.gain * deg + ALIKE.offset)));
    }
    expect(worst).toBeLessThan(1);
  });
});
