import { US_PER_S } from '../../src/clock/clock.ts';
import type { Plan } from '../../src/drive/plan.ts';
import type { FollowerSpec } from '../../src/follower/spec.ts';
import type { LeaderSpec } from '../../src/leader/spec.ts';
import { compileMap } from '../../src/map/compile.ts';
import type { WireChoice } from '../../src/wire/choice.ts';
import { encodeFromBoard } from '../../src/wire/frames-board.ts';
import { FRAME_BYTES_MAX } from '../../src/wire/frames-layout.ts';
import type { BoardPlan } from '../../src/wire/types.ts';

/** What every way of the bench is given: one hand, so many arms, and the bytes the hand's board sends. */
export interface Scene {
  readonly plan: Plan;
  readonly wire: WireChoice;
  readonly leaderBoard: BoardPlan;
  /** One board a follower. */
  readonly followerBoards: readonly BoardPlan[];
}

export const JOINTS = 8;
/** A leader at 1 kHz, and every follower due on every reading. */
export const PERIOD_US = 1_000;
/** The run has lasted an hour: its stamps are past 2^31 us, as they are in use, and no small integers any more. */
export const START_US = 3_600 * US_PER_S;
const RAD = Math.PI / 180;
const INPUT_NAMES = Array.from({ length: JOINTS }, (_, j) => `j${j}`);

export function scene(followers: number, wire: 'frames' | 'lines'): Scene {
  const specs = Array.from({ length: followers }, (_, f) => follower(f));
  return {
    plan: { leader: leader(), followers: specs, unison: false, pace: 1 },
    wire: wire === 'frames' ? { name: 'frames' } : { name: 'lines', lines: lineTexts() },
    leaderBoard: {
      boardName: null,
      inputs: { channels: INPUT_NAMES.map((_, j) => j), names: INPUT_NAMES, samplingMs: 1 },
      outputs: [],
    },
    followerBoards: specs.map((spec) => ({ boardName: null, inputs: null, outputs: [output(spec)] })),
  };
}

function lineTexts(): Extract<WireChoice, { name: 'lines' }>['lines'] {
  const template = `S${INPUT_NAMES.map((name) => `{${name}.deg:1}`).join(',')}\n`;
  return { separator: null, sends: 'always', checksum: null, template, limp: null, powerOn: null, powerOff: null };
}

function leader(): LeaderSpec {
  return {
    name: 'handstick',
    timeoutUs: 250_000,
    countsMin: 0,
    countsMax: 4_095,
    buttons: [],
    joints: INPUT_NAMES.map((name, j) => ({
      name,
      input: j,
      map: compileMap(LEADER_POINTS, 'straight', 'extend'),
      travelMin: 300,
      travelMax: 3_800,
      despike: 3,
      smooth: { cutoffHz: 1.5, betaHzPerRadS: 0.08 / RAD, slopeCutoffHz: 1 },
    })),
  };
}

/** Counts and radians, as a fit would find them. */
export const LEADER_POINTS = [
  [400, -120 * RAD],
  [2_048, 0],
  [3_700, 120 * RAD],
] as const;

/** Radians and microseconds: an end to end measured servo, and one measured in the middle too. */
const SERVO_POINTS = [
  [-90 * RAD, 560],
  [90 * RAD, 2_440],
] as const;
const MIDDLE_TOO = [SERVO_POINTS[0], [0, 1_520], SERVO_POINTS[1]] as const;

/** Points of the servo on channel `k`, every arm's alike. */
export function servoPoints(k: number): readonly (readonly [number, number])[] {
  return k % 2 === 0 ? SERVO_POINTS : MIDDLE_TOO;
}

/**
 * No two arms are alike: gains, offsets and limits differ a little, so that no branch goes the same way in all. One joint
 * copies two of the leader's, and one servo turns with two joints.
 */
function follower(f: number): FollowerSpec {
  return {
    name: `f${f}`,
    periodUs: PERIOD_US,
    joinShare: 0.25,
    joinMeet: 'move',
    wake: 'rest',
    stopCategory: 2,
    hasPower: false,
    onLostPulse: 'limp',
    poses: new Map(),
    joints: INPUT_NAMES.map((name, j) => ({
      name,
      sources: [{ joint: j, weight: 1 }, ...(j === 5 ? [{ joint: 4, weight: -0.25 }] : [])],
      gain: ((f + j) % 2 === 0 ? 1 : -1) * (0.6 + 0.03 * ((3 * f + j) % 11)),
      offsetRad: ((f % 5) - 2) * RAD,
      // Some joints are asked past their range, as happens with every hand.
      minRad: (j === 1 ? -12 : -80) * RAD,
      maxRad: 80 * RAD,
      deadbandRad: 0.2 * RAD,
      speedRadS: 3,
      accelRadS2: 12,
      restRad: 0,
    })),
    servos: INPUT_NAMES.map((_, j) => ({
      channel: j,
      turns: [{ joint: j, weight: 1 }, ...(j === 3 ? [{ joint: 2, weight: 0.2 }] : [])],
      map: compileMap(servoPoints(j), 'straight', 'clamp'),
      deadbandUs: 4,
    })),
  };
}

function output(spec: FollowerSpec): BoardPlan['outputs'][number] {
  return {
    follower: spec.name,
    joints: spec.joints.map((joint) => joint.name),
    servos: spec.servos.map((servo, j) => ({
      channel: servo.channel,
      minUs: servo.map.yMin,
      maxUs: servo.map.yMax,
      joint: INPUT_NAMES[j] as string,
    })),
    power: null,
  };
}

/** Counts of joint `j` at reading `k`: a slow hand, a tremor of 10 Hz, and one count of converter noise. */
export function countAt(k: number, j: number): number {
  const s = (k * PERIOD_US) / US_PER_S;
  const hand = 330 * Math.sin(0.7 * s + j) + 60 * Math.sin(2.3 * s + 2 * j);
  return Math.round(2_048 + hand + 2 * Math.sin(62.8 * s + j)) + ((k * 7 + j * 3) % 5 === 0 ? 1 : 0);
}

export type CountAt = (k: number, j: number) => number;

/** What the leader's board says at each reading; the first of `frames` is its greeting. */
export function chunks(wire: 'frames' | 'lines', readings: number, count: CountAt = countAt): readonly Uint8Array[] {
  return Array.from({ length: readings }, (_, k) => (wire === 'frames' ? frameAt(k, count) : lineAt(k, count)));
}

const scratch = new Uint8Array(FRAME_BYTES_MAX);

export function greeting(): Uint8Array {
  const hello = { kind: 'hello', started: true, inputs: JOINTS, outputs: 0, name: 'handstick' } as const;
  return scratch.slice(0, encodeFromBoard(hello, 0, START_US, scratch));
}

function frameAt(k: number, count: CountAt): Uint8Array {
  const counts = INPUT_NAMES.map((_, j) => count(k, j));
  const message = { kind: 'readings', firstChannel: 0, counts } as const;
  return scratch.slice(0, encodeFromBoard(message, (k + 1) & 0xff, START_US + (k + 1) * PERIOD_US, scratch));
}

function lineAt(k: number, count: CountAt): Uint8Array {
  return new TextEncoder().encode(`${INPUT_NAMES.map((_, j) => count(k, j)).join(',')}\n`);
}
