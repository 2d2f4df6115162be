/**
 * A port that takes nothing for a while, as a USB bridge or a radio link does: what the other arm gets meanwhile, and how
 * the blocked one goes on. Judged from the pins, and over the gap itself from the commands.
 */
import { beforeAll, describe, expect, it } from 'vitest';
import { BRAKING_US, expectInsideLimits, expectStill, LIMITS, SPEED_US_S } from './braking.ts';
import { COMMAND_US, FRAME_US, LINE_US, NEAR_US, US_PER_DEG } from './timing.ts';
import { effort, PULSE_ERROR_US, pulseAt, trainOf, unsteadiness } from './trains.ts';
import { troupe, voltsOf } from './troupe.ts';
import type { Troupe } from './troupe.ts';
import type { UnoBoard } from './uno.ts';
import type { WiredBoard } from './wired.ts';

const FILES = {
  'rig.yaml': `
rig: blocked
leader:
  leader: handstick
  port: serial:/dev/ttyACM0
  wire: firmata
  timeout_ms: 250
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
`,
};
const PIN = 3;

/** What an arm at full speed does in one command interval. */
const PER_COMMAND_US = (SPEED_US_S * COMMAND_US) / 1e6;
/** A pulse that missed its command by the whole of it, rounding included; another period would be twice as much. */
const UNDISTURBED_US = PER_COMMAND_US + 2 * PULSE_ERROR_US;

interface Gap {
  readonly fromUs: number;
  readonly toUs: number;
}

interface Command {
  readonly tUs: number;
  readonly deg: number;
}

describe('a port that takes nothing for a while', () => {
  let all: Troupe;
  let blocked: WiredBoard;
  let wren: UnoBoard;
  let stork: UnoBoard;
  const commands: Command[] = [];
  const now = (): number => all.clock.nowUs();

  beforeAll(() => {
    all = troupe(FILES);
    all.turn(900);
    all.until('the boards answer', 3_000_000, () => all.state('wren') === 'waking' && all.state('stork') === 'waking');
    const stage = all.stage('wren');
    let made = stage.commands;
    all.live.events$.subscribe(({ tUs }) => {
      if (stage.commands === made || stage.kind !== 'move') return;
      made = stage.commands;
      commands.push({ tUs, deg: ((stage.arm.governor.x[0] as number) * 180) / Math.PI });
    });
    all.key('go');
    all.until('both follow', 5_000_000, () => all.state('wren') === 'following' && all.state('stork') === 'following');
    blocked = all.at('serial:/dev/ttyACM1');
    wren = blocked.board;
    stork = all.at('serial:/dev/ttyACM2').board;
  });

  /** 170 degrees at 60 deg/s: both arms are on their way for 3 s, at full speed after 0.25. */
  const sendAcross = (counts: number): void => {
    all.turn(counts);
    all.wait(400_000);
  };

  /** Blocks wren's port and releases it. Returns when. */
  const blockFor = (forUs: number): Gap => {
    const fromUs = now();
    blocked.far.block();
    all.wait(forUs);
    blocked.far.release();
    return { fromUs, toUs: now() };
  };

  /** The other arm moves on at full speed, frame by frame, through all of the gap. */
  const expectUndisturbed = (fromUs: number, toUs: number): void => {
    const train = trainOf(stork, PIN, fromUs - 5 * FRAME_US, toUs + 5 * FRAME_US);
    expect(train.length).toBeGreaterThan((toUs - fromUs) / FRAME_US);
    const towards = Math.sign((train.at(-1)?.widthUs ?? 0) - (train[0]?.widthUs ?? 0));
    expect(unsteadiness(train, towards * SPEED_US_S)).toBeLessThanOrEqual(UNDISTURBED_US);
  };

  /** Limits over the gap, from the commands: what holds for any three of them, however far apart. */
  const expectLimitsKept = (fromUs: number): void => {
    const train = commands.filter(({ tUs }) => tUs >= fromUs);
    expect(train.length).toBeGreaterThan(20);
    for (let at = 2; at < train.length; at++) {
      const [a, b, c] = train.slice(at - 2, at + 1) as [Command, Command, Command];
      const [dt1, dt2] = [(b.tUs - a.tUs) / 1e6, (c.tUs - b.tUs) / 1e6];
      const [v1, v2] = [(b.deg - a.deg) / dt1, (c.deg - b.deg) / dt2];
      expect(Math.abs(v2)).toBeLessThanOrEqual(60 + 1e-6);
      expect(Math.abs((2 * (v2 - v1)) / (dt1 + dt2))).toBeLessThanOrEqual(240 + 1e-6);
    }
  };

  /** What the servo is asked for in one frame when the port is open again. */
  const leapAt = (toUs: number): number => {
    const train = trainOf(wren, PIN, toUs - FRAME_US, toUs + 3 * FRAME_US);
    return Math.max(...train.slice(1).map(({ widthUs }, at) => Math.abs(widthUs - (train[at]?.widthUs ?? 0))));
  };

  const expectHeldWhileBlocked = (fromUs: number, toUs: number): void => {
    const held = trainOf(wren, PIN, fromUs + LINE_US + FRAME_US, toUs);
    expect(held.length).toBeGreaterThan(5);
    for (const { widthUs } of held) expect(Math.abs(widthUs - (held[0]?.widthUs ?? 0))).toBeLessThanOrEqual(NEAR_US);
  };

  describe('for 180 ms', () => {
    let gap: Gap;
    beforeAll(() => {
      sendAcross(120);
      gap = blockFor(180_000);
      all.wait(500_000);
    });

    it('delays the other arm by nothing', () => expectUndisturbed(gap.fromUs, gap.toUs));

    it('leaves its own arm at the last pulse, and goes on from there by itself, with no leap beyond the braking distance', () => {
      expectHeldWhileBlocked(gap.fromUs, gap.toUs);
      const leap = leapAt(gap.toUs);
      // The command that was under way when the port blocked arrives with the first one after it.
      expect(leap).toBeLessThanOrEqual(BRAKING_US + PER_COMMAND_US + 2 * PULSE_ERROR_US);
      expect(all.state('wren')).toBe('following');
      const afterUs = gap.toUs + LINE_US + FRAME_US;
      expectInsideLimits(trainOf(wren, PIN, afterUs));
      expect(effort(trainOf(wren, PIN, afterUs), 8, LIMITS).speedShown).toBeGreaterThan(0.9);
      console.log(`after 180 ms without commands: a leap of ${leap.toFixed(1)} us, braking distance 78.3 us`);
    });

    it('keeps the limits over the gap', () => expectLimitsKept(gap.fromUs - 200_000));
  });

  describe('for 400 ms, longer than the timeout', () => {
    let gap: Gap;
    beforeAll(() => {
      gap = blockFor(400_000);
      all.wait(100_000);
    });

    it('delays the other arm by nothing', () => expectUndisturbed(gap.fromUs, gap.toUs));

    it('is lost contact: its arm stands within the braking distance, and waits for join under a moving hand', () => {
      expectHeldWhileBlocked(gap.fromUs, gap.toUs);
      const leap = leapAt(gap.toUs);
      expect(leap).toBeLessThanOrEqual(BRAKING_US + PER_COMMAND_US + 2 * PULSE_ERROR_US);
      const sinceUs = now();
      all.sway(0, (atUs) => voltsOf(512 + 300 * Math.sin(((atUs - sinceUs) / 1e6) * 4)));
      all.wait(600_000);
      expect(all.state('wren')).toBe('holding');
      expectStill(wren, PIN, gap.toUs + LINE_US + FRAME_US);
      console.log(`after 400 ms without commands: a leap of ${leap.toFixed(1)} us, then it stands`);
    });

    it('joins from there inside its limits', () => {
      const joinedUs = now();
      all.key('join', 'wren');
      all.turn(900);
      all.until('wren follows', 4_000_000, () => all.state('wren') === 'following');
      all.until('stork is there', 2_000_000, () => !all.stage('stork').is.moving);
      expectInsideLimits(trainOf(wren, PIN, joinedUs - 200_000));
      // 900 counts are 116.4 degrees, cut to 85: 1500 + 85 * 10.444 = 2387.8 us.
      expect(Math.abs(pulseAt(wren, PIN, now()).widthUs - 2388)).toBeLessThanOrEqual(NEAR_US + US_PER_DEG);
      expectLimitsKept(gap.fromUs - 200_000);
    });
  });

  describe('for 800 ms, until it is given up and opened anew, which restarts the board', () => {
    it('delays the other arm by nothing, and the arm wakes at its last pose after the operator’s go', () => {
      sendAcross(120);
      const gap = blockFor(800_000);
      all.wait(100_000);
      expectUndisturbed(gap.fromUs, gap.toUs);
      expect(all.words.filter(({ kind }) => kind === 'lost_port')).toMatchObject([
        { fault: { code: 'PORT_STALLED', address: 'serial:/dev/ttyACM1' } },
      ]);
      all.until('wren is back', 6_000_000, () => all.state('wren') === 'waking');
      const restartedUs = now();
      all.wait(200_000);
      expect(trainOf(wren, PIN, gap.toUs)).toEqual([]);
      const last = commands.at(-1)?.deg ?? Number.NaN;
      all.key('go', 'wren');
      all.wait(150_000);
      const first = trainOf(wren, PIN, restartedUs)[0]?.widthUs ?? Number.NaN;
      expect(Math.abs(first - (1500 + last * US_PER_DEG))).toBeLessThanOrEqual(NEAR_US);
    });
  });
});
