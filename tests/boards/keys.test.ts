/** What an operator asks of a running arm: hold, clutch, pace, the enable pedal, parking. Judged from the pins. */
import { beforeAll, describe, expect, it } from 'vitest';
import { expectBrakeAndHold, expectInsideLimits, expectStill, LIMITS, SPEED_US_S } from './braking.ts';
import { NEAR_US, READING_US, US_PER_DEG } from './timing.ts';
import { effort, pulseAt, trainOf, widthsOf } from './trains.ts';
import { troupe, voltsOf } from './troupe.ts';
import type { Troupe } from './troupe.ts';
import type { UnoBoard } from './uno.ts';

const RIG = `
rig: keys
leader:
  leader: handstick
  port: serial:/dev/ttyACM0
  wire: firmata
  joints:
    - { name: shoulder, channel: 0, points: [[112, -120], [912, 120]] }
  buttons:
    - { name: pedal, channel: 5, pressed: below, counts: 300, does: enable }
followers:
  - follower: wren
    port: serial:/dev/ttyACM1
    wire: firmata
    rate_hz: 50
    join: { speed: 0.5 }
    joints:
      - name: shoulder
        from: shoulder
        range_deg: [-85, 85]
        speed_deg_s: 60
        accel_deg_s2: 240
        rest_deg: -20
        servo: { channel: 9, points: [[-90, 560], [90, 2440]] }
`;
const PIN = 9;
const PEDAL = 5;
const PRESSED_VOLTS = 0.5;
const RELEASED_VOLTS = 4;
/** Counts of the leader at an angle: 0.3 degrees a count, zero in the middle. */
const countsOf = (deg: number): number => Math.round(512 + deg / 0.3);

describe('an arm in the operator’s hands', () => {
  let all: Troupe;
  let board: UnoBoard;
  const now = (): number => all.clock.nowUs();
  const pulse = (): number => pulseAt(board, PIN, now()).widthUs;
  const follows = (): boolean => all.state('wren') === 'following';

  beforeAll(() => {
    all = troupe(RIG);
    all.turn(countsOf(-20));
    all.until('the ports are open', 100_000, () => all.words.length === 2);
    all.sway(PEDAL, () => PRESSED_VOLTS);
    all.until('the boards answer', 3_000_000, () => all.state('wren') === 'waking');
    board = all.at('serial:/dev/ttyACM1').board;
    all.key('go');
    all.until('wren follows', 2_000_000, follows);
    // The limits open over a second.
    all.wait(1_000_000);
  });

  it('brakes and holds at the hold key, and goes on at join', () => {
    all.turn(countsOf(80));
    all.wait(600_000);
    const heldUs = now();
    all.key('hold');
    all.wait(700_000);
    expectBrakeAndHold(board, PIN, heldUs, [0, 0]);
    all.key('join');
    all.until('wren follows', 4_000_000, follows);
    all.wait(300_000);
    // 80 degrees are 738.67 counts; 739 read as 80.1 degrees: 1500 + 80.1 * 10.444 = 2336.6 us.
    expect(Math.abs(pulse() - 2337)).toBeLessThanOrEqual(NEAR_US);
    expectInsideLimits(trainOf(board, PIN, heldUs));
  });

  it('brakes and holds when the enable pedal is let go, and joins by itself when it is pressed again', () => {
    all.wait(700_000);
    all.turn(countsOf(-60));
    all.wait(600_000);
    const releasedUs = now();
    all.sway(PEDAL, () => RELEASED_VOLTS);
    all.wait(600_000);
    expectBrakeAndHold(board, PIN, releasedUs, [0, READING_US]);
    expect(all.state('wren')).toBe('holding');
    all.sway(PEDAL, () => PRESSED_VOLTS);
    all.until('wren follows', 4_000_000, follows);
    expectInsideLimits(trainOf(board, PIN, releasedUs));
  });

  it('stands while the clutch is out, and takes the hand from where both are, without a jump', () => {
    all.turn(countsOf(0));
    all.until('wren is at zero', 4_000_000, () => Math.abs(pulse() - 1500) < NEAR_US);
    all.wait(200_000);
    const outUs = now();
    all.key('clutch');
    all.wait(60_000);
    all.sway(0, (atUs) => voltsOf(512 + Math.min((atUs - outUs) / 4_000, 150)));
    all.wait(800_000);
    expectStill(board, PIN, outUs);
    const inUs = now();
    all.key('clutch');
    all.wait(300_000);
    expectStill(board, PIN, outUs);
    // The hand was moved by 150 counts, 45 degrees; it now goes back by 20, and so does the arm.
    all.turn(512 + 150 - 67);
    all.wait(900_000);
    // 67 counts are 20.1 degrees: 1500 - 20.1 * 10.444 = 1290.1 us.
    expect(Math.abs(pulse() - 1290)).toBeLessThanOrEqual(NEAR_US);
    expectInsideLimits(trainOf(board, PIN, inUs));
  });

  it('goes a quarter as fast at pace 25 %', () => {
    all.live.key('pace', undefined, 0.25);
    all.wait(300_000);
    const slowUs = now();
    all.turn(countsOf(80));
    all.wait(900_000);
    const slow = { ...LIMITS, speed: SPEED_US_S / 4 };
    const { speed, accel, speedShown } = effort(trainOf(board, PIN, slowUs), 20, slow);
    expect(speed).toBeLessThanOrEqual(1);
    expect(accel).toBeLessThanOrEqual(1);
    expect(speedShown).toBeGreaterThan(0.97);
    all.live.key('pace', undefined, 1);
  });

  it('parks at its rest pose at its join speed, and stays there under a moving hand until join', () => {
    const parkedUs = now();
    all.key('park');
    all.until('wren is parked', 5_000_000, () => all.state('wren') === 'holding');
    const { speed, accel } = effort(trainOf(board, PIN, parkedUs + 200_000), 10, { ...LIMITS, speed: SPEED_US_S / 2 });
    expect(speed).toBeLessThanOrEqual(1);
    expect(accel).toBeLessThanOrEqual(1);
    all.wait(60_000);
    const restUs = now();
    const sinceUs = now();
    all.sway(0, (atUs) => voltsOf(512 + 200 * Math.sin((atUs - sinceUs) / 2e5)));
    all.wait(500_000);
    expectStill(board, PIN, restUs);
    // Rest is -20 degrees: 1500 - 208.9 = 1291.1 us.
    expect(Math.abs(pulse() - 1291)).toBeLessThanOrEqual(NEAR_US);
    all.key('join');
    all.wait(700_000);
    const widths = widthsOf(trainOf(board, PIN, restUs));
    expect(Math.max(...widths) - Math.min(...widths)).toBeGreaterThan(5 * US_PER_DEG);
  });
});
