/** A board that restarts in mid-run (a reset button, a dip of its supply), and the other arm meanwhile: judged from the pins. */
import { beforeAll, describe, expect, it } from 'vitest';
import { expectInsideLimits, SPEED_US_S } from './braking.ts';
import { COMMAND_US, FRAME_US, NEAR_US, US_PER_DEG } from './timing.ts';
import { PULSE_ERROR_US, trainOf, unsteadiness } from './trains.ts';
import { troupe } from './troupe.ts';
import type { Troupe } from './troupe.ts';
import type { UnoBoard } from './uno.ts';

const FILES = {
  'rig.yaml': `
rig: reboot
leader:
  leader: handstick
  port: serial:/dev/ttyACM0
  wire: firmata
  joints:
    - { name: shoulder, channel: 0, points: [[112, -120], [912, 120]] }
followers:
  - wren.yaml
  - { like: wren.yaml, follower: stork, port: serial:/dev/ttyACM2 }
`,
  'wren.yaml': `
follower: wren
port: serial:/dev/ttyACM1
wire: firmata
rate_hz: 50
join: { speed: 1 }
joints:
  - name: shoulder
    from: shoulder
    range_deg: [-85, 85]
    speed_deg_s: 60
    accel_deg_s2: 240
    servo: { channel: 3, points: [[-90, 560], [90, 2440]] }
  - name: elbow
    from: shoulder
    gain: 0.5
    direction: reversed
    range_deg: [-85, 85]
    speed_deg_s: 60
    accel_deg_s2: 240
    servo: { channel: 5, points: [[-90, 560], [90, 2440]] }
`,
};
const SHOULDER = 3;
const ELBOW = 5;
/** The firmware says nothing for 1.88 s after a reset (it blinks its version first), then its name, in 46 bytes. */
const SILENT_US = 1_950_000;

describe('a follower’s board that restarts in mid-run', () => {
  let all: Troupe;
  let wren: UnoBoard;
  let stork: UnoBoard;
  let resetUs: number;
  let lastDeg: number[];
  const now = (): number => all.clock.nowUs();

  beforeAll(() => {
    all = troupe(FILES);
    all.turn(900);
    all.until('the boards answer', 3_000_000, () => all.state('wren') === 'waking' && all.state('stork') === 'waking');
    all.key('go');
    all.until('both follow', 5_000_000, () => all.state('wren') === 'following' && all.state('stork') === 'following');
    wren = all.at('serial:/dev/ttyACM1').board;
    stork = all.at('serial:/dev/ttyACM2').board;
    // 170 degrees at 60 deg/s: both are on their way for 2.8 s, past the reboot's end.
    all.turn(120);
    all.wait(400_000);
    resetUs = now();
    wren.reset();
  });

  it('is noticed as soon as it speaks, and said', () => {
    const rebooted = (): boolean => all.words.some(({ kind }) => kind === 'rebooted');
    expect(all.until('the reboot is noticed', 2_500_000, rebooted) - resetUs).toBeLessThan(SILENT_US);
    expect(all.words.filter(({ kind }) => kind === 'rebooted')).toEqual([
      { kind: 'rebooted', address: 'serial:/dev/ttyACM1' },
    ]);
    all.until('wren is back', 500_000, () => all.state('wren') === 'waking');
    expect(all.live.status().boards.map(({ reboots }) => reboots)).toEqual([0, 1, 0]);
    lastDeg = [...all.stage('wren').arm.governor.x].map((rad) => (rad * 180) / Math.PI);
  });

  it('does not disturb the other arm, which moves on frame by frame', () => {
    const train = trainOf(stork, SHOULDER, resetUs, now());
    expect(train.length).toBeGreaterThan(90);
    expect(unsteadiness(train, -SPEED_US_S)).toBeLessThan((SPEED_US_S * COMMAND_US) / 1e6 + 2 * PULSE_ERROR_US);
  });

  it('has no pulses until the operator’s go', () => {
    all.wait(700_000);
    for (const pin of [SHOULDER, ELBOW]) expect(trainOf(wren, pin, resetUs), `pin ${pin}`).toEqual([]);
  });

  it('then wakes servo after servo at the pose it was told last, and joins inside its limits', () => {
    const goUs = now();
    all.key('go', 'wren');
    all.wait(1_000_000);
    const [shoulder = Number.NaN, elbow = Number.NaN] = lastDeg;
    const firsts = [SHOULDER, ELBOW].map((pin) => trainOf(wren, pin, goUs)[0]);
    expect(Math.abs((firsts[0]?.widthUs ?? Number.NaN) - (1500 + shoulder * US_PER_DEG))).toBeLessThanOrEqual(NEAR_US);
    expect(Math.abs((firsts[1]?.widthUs ?? Number.NaN) - (1500 + elbow * US_PER_DEG))).toBeLessThanOrEqual(NEAR_US);
    const apartUs = (firsts[1]?.startUs ?? Number.NaN) - (firsts[0]?.startUs ?? Number.NaN);
    // 100 ms, less the 32.8 ms that the first one waits for the board's timer, and a frame either way.
    expect(apartUs).toBeGreaterThan(100_000 - 32_800 - FRAME_US);
    expect(apartUs).toBeLessThan(100_000 + FRAME_US);
    all.until('wren follows', 4_000_000, () => all.state('wren') === 'following');
    all.wait(300_000);
    for (const pin of [SHOULDER, ELBOW]) expectInsideLimits(trainOf(wren, pin, goUs));
    // 120 counts are -117.6 degrees, cut to -85, and half of it the other way: 1500 + 58.8 * 10.444.
    const ends = [SHOULDER, ELBOW].map((pin) => wren.pulses(pin).at(-1)?.widthUs ?? Number.NaN);
    expect(Math.abs((ends[0] as number) - 612)).toBeLessThanOrEqual(NEAR_US);
    expect(Math.abs((ends[1] as number) - 2114)).toBeLessThanOrEqual(NEAR_US);
  });
});
