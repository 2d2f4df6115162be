/** A leader that falls silent, and one whose cable is pulled: the arm brakes, holds, and joins again. Judged from the pins. */
import { beforeAll, describe, expect, it } from 'vitest';
import { expectBrakeAndHold, LIMITS, SPEED_US_S } from './braking.ts';
import { COMMAND_US, NEAR_US, READING_US, US_PER_DEG } from './timing.ts';
import { effort, PULSE_ERROR_US, pulseAt, trainOf, unsteadiness } from './trains.ts';
import { troupe, voltsOf } from './troupe.ts';
import type { Troupe } from './troupe.ts';
import type { UnoBoard } from './uno.ts';
import type { WiredBoard } from './wired.ts';

const RIG = `
rig: lost
leader:
  leader: handstick
  port: serial:/dev/ttyACM0
  wire: firmata
  timeout_ms: 250
  joints:
    - { name: shoulder, channel: 0, points: [[112, -120], [912, 120]] }
followers:
  - follower: wren
    port: serial:/dev/ttyACM1
    wire: firmata
    rate_hz: 50
    join: { speed: 0.25 }
    joints:
      - name: shoulder
        from: shoulder
        range_deg: [-85, 85]
        speed_deg_s: 60
        accel_deg_s2: 240
        servo: { channel: 3, points: [[-90, 560], [90, 2440]] }
`;
const PIN = 3;
const TIMEOUT_US = 250_000;

describe('an arm whose leader is lost', () => {
  let all: Troupe;
  let leader: WiredBoard;
  let wren: UnoBoard;
  const now = (): number => all.clock.nowUs();

  /** The hand goes far away, at once, and the arm follows at full speed. */
  const sendFar = (counts: number): void => {
    all.turn(counts);
    all.wait(500_000);
  };

  beforeAll(() => {
    all = troupe(RIG);
    all.turn(512);
    all.until('the boards answer', 3_000_000, () => all.state('wren') === 'waking');
    all.key('go');
    all.until('wren follows', 2_000_000, () => all.state('wren') === 'following');
    leader = all.at('serial:/dev/ttyACM0');
    wren = all.at('serial:/dev/ttyACM1').board;
    // The limits open over a second.
    all.wait(1_000_000);
  });

  it('goes on for the timeout when the leader falls silent, then brakes and holds', () => {
    sendFar(900);
    const silentUs = now();
    leader.far.corrupt((bytes, toward) => (toward === 'near' ? bytes.subarray(0, 0) : bytes));
    all.wait(900_000);
    // The last reading was up to a sampling interval old. Until then the arm moves on at full speed.
    const running = trainOf(wren, PIN, silentUs - 100_000, silentUs + TIMEOUT_US - READING_US);
    expect(unsteadiness(running, SPEED_US_S)).toBeLessThan((SPEED_US_S * COMMAND_US) / 1e6 + 2 * PULSE_ERROR_US);
    expectBrakeAndHold(wren, PIN, silentUs, [TIMEOUT_US - READING_US, TIMEOUT_US]);
    expect(all.state('wren')).toBe('holding');
  });

  it('joins by itself when the leader speaks again, at its join speed', () => {
    const from = pulseAt(wren, PIN, now()).widthUs;
    // Twenty degrees on: 20 / 15 deg/s = 1.3 s.
    const towards = (from - 1500) / US_PER_DEG + 20;
    all.turn(512 + towards / 0.3);
    leader.far.corrupt(null);
    const backUs = now();
    all.until('wren follows', 2_000_000, () => all.state('wren') === 'following');
    const metUs = now();
    expect(metUs - backUs).toBeGreaterThan(1_000_000);
    const { speed, speedShown } = effort(trainOf(wren, PIN, backUs, metUs), 15, { ...LIMITS, speed: SPEED_US_S / 4 });
    expect(speed).toBeLessThanOrEqual(1);
    expect(speedShown).toBeGreaterThan(0.9);
  });

  it('brakes at once when the leader’s cable is pulled, and holds under moving pots', () => {
    all.wait(1_000_000);
    sendFar(150);
    const pulledUs = now();
    leader.unplug();
    all.sway(0, (atUs) => voltsOf(512 + 200 * Math.sin(atUs / 2e5)));
    all.wait(700_000);
    expectBrakeAndHold(wren, PIN, pulledUs, [0, 0]);
    const lost = all.words.filter(({ kind }) => kind === 'lost_port');
    expect(lost).toMatchObject([{ fault: { code: 'PORT_CLOSED', address: 'serial:/dev/ttyACM0' } }]);
  });

  it('joins again when the cable is back and the board has started', () => {
    const held = pulseAt(wren, PIN, now()).widthUs;
    const pluggedUs = now();
    all.turn(512);
    leader.replug();
    all.until('the leader is back', 4_000_000, () => all.words.at(-1)?.kind === 'greeted');
    expect(now() - pluggedUs).toBeGreaterThan(1_800_000);
    for (const { widthUs } of trainOf(wren, PIN, pluggedUs))
      expect(Math.abs(widthUs - held)).toBeLessThanOrEqual(NEAR_US);
    all.until('wren follows', 6_000_000, () => all.state('wren') === 'following');
    all.wait(400_000);
    expect(Math.abs(pulseAt(wren, PIN, now()).widthUs - 1500)).toBeLessThanOrEqual(NEAR_US);
    // Never without pulses: the servo was held all the while.
    const starts = trainOf(wren, PIN, pluggedUs).map(({ startUs }) => startUs);
    for (let at = 1; at < starts.length; at++)
      expect((starts[at] as number) - (starts[at - 1] as number)).toBeLessThan(21_000);
  });
});
