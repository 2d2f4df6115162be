/**
 * One hand, two arms, three boards, from power-on to the last pulse: greeting, waking, joining, following, parking.
 * Pulses are judged against the remap done by hand, and always as a servo sees them: on the pins.
 */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { wakeMemory } from '../../src/bridge/wake-memory.ts';
import { straight, within } from './by-hand.ts';
import { median } from './solo.ts';
import { FRAME_US, NEAR_US } from './timing.ts';
import { pulseAt, trainOf, widthsOf } from './trains.ts';
import { troupe } from './troupe.ts';
import type { Troupe } from './troupe.ts';
import type { UnoBoard } from './uno.ts';

const RIG = `
rig: lantern-yard
leader:
  leader: handstick
  port: serial:/dev/ttyACM0
  wire: firmata
  joints:
    - { name: shoulder, channel: 0, points: [[112, -120], [512, 0], [911, 120]] }
    - { name: elbow,    channel: 1, points: [[100, 90], [924, -90]] }
    - { name: wrist,    channel: 2, points: [[0, -150], [1023, 150]] }
followers:
  - follower: wren
    port: serial:/dev/ttyACM1
    wire: firmata
    wake: ask
    join: { speed: 1 }
    joints:
      - name: shoulder
        from: shoulder
        gain: 0.5
        direction: reversed
        offset_deg: 12
        range_deg: [-60, 60]
        speed_deg_s: 120
        accel_deg_s2: 600
        servo: { channel: 5, points: [[-90, 560], [90, 2440]] }
      - name: lift
        from: { shoulder: 1, wrist: -0.5 }
        gain: 0.4
        offset_deg: -5
        range_deg: [-90, 90]
        speed_deg_s: 120
        accel_deg_s2: 600
        servo: { channel: 6, points: [[-90, 2400], [0, 1480], [90, 600]] }
      - name: twist                       # copies nothing
        range_deg: [-20, 20]
        speed_deg_s: 120
        accel_deg_s2: 600
        rest_deg: 15
        servo: { channel: 7, points: [[-90, 600], [90, 2400]] }
  - follower: stork
    port: serial:/dev/ttyACM2
    wire: firmata
    wake: ask
    join: { speed: 1 }
    joints:
      - name: shoulder
        from: elbow
        stretch: true
        range_deg: [-40, 70]
        speed_deg_s: 120
        accel_deg_s2: 600
      - name: elbow
        from: wrist
        gain: 0.6
        deadband_deg: 0.8
        range_deg: [-50, 50]
        speed_deg_s: 120
        accel_deg_s2: 600
        rest_deg: -10
    servos:
      - { channel: 9,  turns: { shoulder: 1 },           points: [[-90, 560], [90, 2440]] }
      - { channel: 10, turns: { shoulder: 1 },           points: [[-90, 2440], [90, 560]] }
      - { channel: 11, turns: { shoulder: 1, elbow: 1 }, points: [[-120, 600], [120, 2400]] }
`;
const WREN = 'serial:/dev/ttyACM1';
const STORK = 'serial:/dev/ttyACM2';

/** As an earlier run left it: wren was not parked. */
const REMEMBERED = { wren: { parked: false, angles_deg: { shoulder: -30, lift: 20, twist: 15 } } };

/** By hand: 1500 - 30 * 1880 / 180 = 1186.7; 1480 - 20 * 880 / 90 = 1284.4; 600 + 105 * 10 = 1650. */
const WREN_WAKES: readonly (readonly [pin: number, us: number])[] = [
  [5, 1187],
  [6, 1284],
  [7, 1650],
];
/** At rest, shoulder 0 and elbow -10 degrees: both middles, and 600 + 110 * 7.5 = 1425. */
const STORK_WAKES: readonly (readonly [pin: number, us: number])[] = [
  [9, 1500],
  [10, 1500],
  [11, 1425],
];

/** What the hand holds still, in counts of shoulder, elbow and wrist; the elbow of stork comes from its rest, -10 degrees. */
const HELD = [
  [300, 700, 650],
  [800, 250, 300],
  [100, 950, 900],
] as const;
type Counts = (typeof HELD)[number];

const leaderDeg = ([shoulder, elbow, wrist]: Counts) => ({
  shoulder: straight(
    [
      [112, -120],
      [512, 0],
      [911, 120],
    ],
    shoulder,
  ),
  elbow: 90 - ((elbow - 100) * 180) / 824,
  wrist: -150 + (wrist * 300) / 1023,
});

/** The pulses of wren's pins 5, 6 and 7, rounded as the wire does. */
function wrenByHand(counts: Counts): number[] {
  const { shoulder, wrist } = leaderDeg(counts);
  const turned = within(-60, 60, -0.5 * shoulder + 12);
  const lifted = within(-90, 90, 0.4 * (shoulder - 0.5 * wrist) - 5);
  const liftUs = lifted < 0 ? 1480 - (lifted * 920) / 90 : 1480 - (lifted * 880) / 90;
  return [1500 + (turned * 1880) / 180, liftUs, 600 + (15 + 90) * 10].map(Math.round);
}

/** The pulses of stork's pins 9, 10 and 11; the elbow's target trails by at most 0.8 degrees. */
function storkByHand(counts: Counts, elbowBefore: number): { readonly elbow: number; readonly pulsesUs: number[] } {
  const { elbow, wrist } = leaderDeg(counts);
  // The leader's elbow travels from -90 (at 924 counts) to 90 degrees (at 100), which is laid over -40..70.
  const shoulder = within(-40, 70, -40 + ((elbow + 90) * 110) / 180);
  const asked = 0.6 * wrist;
  const bent = within(-50, 50, within(asked - 0.8, asked + 0.8, elbowBefore));
  const us = (shoulder * 1880) / 180;
  return { elbow: bent, pulsesUs: [1500 + us, 1500 - us, 600 + (shoulder + bent + 120) * 7.5].map(Math.round) };
}

/** A servo's first command: its slot primed on the spare pin and its configuration, 8 + 3 + 3 + 8 + 3 bytes at 57600 baud, 8N1. */
const FIRST_LINE_US = (25 * 10e6) / 57_600;
/** The firmware's own loop, with a round of analog conversions in it. */
const LOOP_US = 2_000;
/** The board's timer runs through once before its first match, 65536 * 8 / 16 MHz; then a servo waits for its frame. */
const FIRST_PULSE_US = FIRST_LINE_US + 32_768 + FRAME_US + LOOP_US;

describe('one hand and two arms on real firmware', () => {
  let folder: string;
  let all: Troupe;
  let wren: UnoBoard;
  let stork: UnoBoard;
  let goUs: number;
  beforeAll(() => {
    folder = mkdtempSync(join(tmpdir(), 'boards-'));
    const file = join(folder, 'wake.json');
    writeFileSync(file, JSON.stringify(REMEMBERED));
    all = troupe(RIG, {
      memory: wakeMemory(file, (detail) => {
        throw new Error(detail);
      }),
    });
    all.turn(...HELD[0]);
    all.wait(1_000);
    wren = all.at(WREN).board;
    stork = all.at(STORK).board;
  });
  afterAll(() => rmSync(folder, { recursive: true, force: true }));

  it('waits for the boards, which start when their ports open, and says so', () => {
    const told = (): string[] => all.words.map(({ kind }) => kind);
    expect(told()).toEqual(['opened', 'opened', 'opened']);
    all.wait(1_500_000);
    expect(told().slice(3)).toEqual(['waiting', 'waiting', 'waiting']);
    expect([all.state('wren'), all.state('stork')]).toEqual(['absent', 'absent']);
    all.wait(1_000_000);
    expect(all.words.slice(6)).toEqual(
      ['serial:/dev/ttyACM0', WREN, STORK].map((address) => ({
        kind: 'greeted',
        address,
        board: 'StandardFirmata',
      })),
    );
    expect([all.state('wren'), all.state('stork')]).toEqual(['waking', 'waking']);
  });

  it('gives no servo a pulse before the operator’s go', () => {
    all.wait(500_000);
    for (const pin of [5, 6, 7]) expect(wren.pulses(pin), `wren, pin ${pin}`).toEqual([]);
    for (const pin of [9, 10, 11]) expect(stork.pulses(pin), `stork, pin ${pin}`).toEqual([]);
  });

  it('wakes one servo after another, 100 ms apart, each at its wake pose from the first pulse on', () => {
    goUs = all.clock.nowUs();
    all.key('go');
    all.wait(900_000);
    const waking = [
      ...WREN_WAKES.map(([pin, us]) => ({ board: wren, pin, us, lastUs: goUs + 200_000 })),
      ...STORK_WAKES.map(([pin, us]) => ({ board: stork, pin, us, lastUs: goUs + 500_000 })),
    ];
    for (const [place, { board, pin, us, lastUs }] of waking.entries()) {
      const turnUs = goUs + place * 100_000;
      const train = board.pulses(pin);
      const first = train[0]?.startUs ?? Number.NaN;
      expect(first, `servo ${place}`).toBeGreaterThan(turnUs);
      expect(first, `servo ${place}`).toBeLessThan(turnUs + FIRST_PULSE_US);
      // Until the last servo of its arm has been told its pulse, nothing of it moves.
      const still = train.filter(({ startUs }, at) => at === 0 || startUs < lastUs);
      for (const { widthUs } of still) expect(Math.abs(widthUs - us), `servo ${place}`).toBeLessThanOrEqual(NEAR_US);
    }
  });

  it('moves from the wake pose to the hand without a leap, and follows', () => {
    all.until('wren follows', 3_000_000, () => all.state('wren') === 'following');
    all.until('stork follows', 3_000_000, () => all.state('stork') === 'following');
    all.wait(400_000);
    for (const [board, pins] of [
      [wren, [5, 6, 7]],
      [stork, [9, 10, 11]],
    ] as const) {
      for (const pin of pins) {
        const widths = widthsOf(board.pulses(pin));
        // At most 120 deg/s, for two command intervals where one pulse has missed a command: 120 * 0.044 * 10.4 = 55 us a
        // frame; pin 11 sums two joints at 7.5 us a degree, 79 us.
        for (let at = 1; at < widths.length; at++)
          expect(Math.abs((widths[at] as number) - (widths[at - 1] as number))).toBeLessThan(79 + NEAR_US);
      }
    }
    expect(Math.abs(pulseAt(wren, 5, all.clock.nowUs()).widthUs - 1187)).toBeGreaterThan(200);
  });

  it('agrees with the remap done by hand: the median of 50 pulses within 1 us, each within 10', () => {
    // The first line on paper: counts 300, 700, 650 are -63.6, -41.068 and 40.616 degrees. Wren's shoulder asks for
    // -0.5 * -63.6 + 12 = 43.8 degrees, 1500 + 43.8 * 1880 / 180 = 1957.5 us; its lift for 0.4 (-63.6 - 20.308) - 5 =
    // -38.563, 1480 + 38.563 * 920 / 90 = 1874.2. Stork's shoulder: -40 + 48.932 * 110 / 180 = -10.097, 1394.5.
    expect(wrenByHand(HELD[0])).toEqual([1957, 1874, 1650]);
    expect(storkByHand(HELD[0], -10).pulsesUs).toEqual([1395, 1605, 1601]);
    let elbow = -10;
    const figures: { median: number; worst: number }[] = [];
    for (const counts of HELD) {
      all.turn(...counts);
      all.wait(1_400_000);
      const sinceUs = all.clock.nowUs();
      all.wait(51 * 20_100);
      const byHand = storkByHand(counts, elbow);
      elbow = byHand.elbow;
      for (const [board, pins, pulsesUs] of [
        [wren, [5, 6, 7], wrenByHand(counts)],
        [stork, [9, 10, 11], byHand.pulsesUs],
      ] as const) {
        for (const [servo, pin] of pins.entries()) {
          const off = widthsOf(trainOf(board, pin, sinceUs).slice(0, 50)).map(
            (width) => width - (pulsesUs[servo] as number),
          );
          expect(off.length).toBe(50);
          figures.push({ median: Math.abs(median(off)), worst: Math.max(...off.map(Math.abs)) });
          expect(Math.abs(median(off)), `counts ${counts.join()}, pin ${pin}`).toBeLessThanOrEqual(1);
          for (const one of off) expect(Math.abs(one), `counts ${counts.join()}, pin ${pin}`).toBeLessThanOrEqual(10);
        }
      }
    }
    const medians = Math.max(...figures.map(({ median: us }) => us));
    const worst = Math.max(...figures.map(({ worst: us }) => us));
    console.log(
      `pulses against the remap by hand, ${figures.length} servo positions of 50 pulses: ` +
        `medians within ${medians.toFixed(2)} us, each within ${worst.toFixed(2)} us`,
    );
  });

  it('parks at the rest pose, ends the pulses when made limp, and leaves the pins low', () => {
    all.key('limp');
    all.until('wren is limp', 4_000_000, () => all.state('wren') === 'limp');
    all.until('stork is limp', 4_000_000, () => all.state('stork') === 'limp');
    all.wait(30_000);
    const endUs = all.clock.nowUs();
    all.wait(200_000);
    // Rest: shoulder 0, lift 0, twist 15 degrees; of a last pulse cut in its midst the one before tells.
    for (const [board, pin, us] of [
      [wren, 5, 1500],
      [wren, 6, 1480],
      [wren, 7, 1650],
      [stork, 9, 1500],
      [stork, 10, 1500],
      [stork, 11, 1425],
    ] as const) {
      const parked = widthsOf(board.pulses(pin)).at(-2) ?? Number.NaN;
      expect(Math.abs(parked - us), `pin ${pin}`).toBeLessThanOrEqual(NEAR_US);
      expect(trainOf(board, pin, endUs), `pin ${pin}`).toEqual([]);
      expect(board.level(pin)).toBe('low');
    }
  });
});
