import { US_PER_S } from '../../src/clock/clock.ts';
import type { FollowerJointSpec, FollowerSpec } from '../../src/follower/spec.ts';
import {
  commandBytes,
  FROM_HOST,
  HOST_HEAD,
  PULSE_STEPS_PER_US,
  SERVO_BYTES,
  seal,
} from '../../src/wire/frames-layout.ts';
import { PERIOD_US, START_US } from './scene.ts';
import type { LeaderFlow } from './stock-leader.ts';

/** What flows down one follower's side; each stage adds its part to a copy. */
export interface FollowerFlow {
  readonly tUs: number;
  readonly wanted: readonly number[];
  readonly held: readonly boolean[];
  readonly due: boolean;
  readonly lastUs: number;
  readonly sinceUs: number;
  readonly target: readonly number[];
  readonly limits: readonly string[];
  readonly state: 'joining' | 'following';
  readonly beganUs: number;
  readonly met: { readonly tUs: number; readonly share: number };
  readonly motion: readonly Motion[];
}

interface Motion {
  readonly x: number;
  readonly v: number;
}

type Wish = Pick<FollowerFlow, 'tUs' | 'wanted' | 'held'>;

export function followerAtFirst(spec: FollowerSpec): FollowerFlow {
  const rest = spec.joints.map((joint) => clamp(joint.restRad, joint.minRad, joint.maxRad));
  return {
    tUs: START_US,
    wanted: rest,
    held: rest.map(() => false),
    due: false,
    lastUs: START_US - PERIOD_US,
    sinceUs: 0,
    target: rest,
    limits: [],
    state: 'joining',
    beganUs: START_US,
    met: { tUs: 0, share: 0 },
    motion: rest.map((x) => ({ x, v: 0 })),
  };
}

export function remapped(spec: FollowerSpec) {
  return ({ tUs, poseRad, health }: LeaderFlow): Wish => ({
    tUs,
    held: spec.joints.map((joint) => joint.sources.some((source) => health[source.joint]?.sick)),
    wanted: spec.joints.map((joint) =>
      joint.sources.reduce(
        (sum, source) => sum + joint.gain * source.weight * (poseRad[source.joint] as number),
        joint.sources.length === 0 ? joint.restRad : joint.offsetRad,
      ),
    ),
  });
}

export function paced(spec: FollowerSpec) {
  return (before: FollowerFlow, wish: Wish): FollowerFlow => {
    const sinceUs = wish.tUs - before.lastUs;
    const due = sinceUs >= 0.9 * spec.periodUs;
    return { ...before, ...wish, due, sinceUs, lastUs: due ? wish.tUs : before.lastUs };
  };
}

export function settled(spec: FollowerSpec) {
  return (before: FollowerFlow, step: FollowerFlow): FollowerFlow => {
    const settle = (joint: FollowerJointSpec, j: number): { target: number; limit: string } => {
      const was = before.target[j] as number;
      const want = step.held[j] ? was : (step.wanted[j] as number);
      const trailing = clamp(was, want - joint.deadbandRad, want + joint.deadbandRad);
      const target = clamp(trailing, joint.minRad, joint.maxRad);
      return { target, limit: target !== trailing ? 'range' : target !== want ? 'deadband' : '' };
    };
    const all = spec.joints.map(settle);
    return { ...step, target: all.map((one) => one.target), limits: all.map((one) => one.limit) };
  };
}

export function governed(spec: FollowerSpec) {
  return (before: FollowerFlow, step: FollowerFlow): FollowerFlow => {
    const { state, beganUs } = before;
    const dtS = Math.min(step.sinceUs, 2 * spec.periodUs) / US_PER_S;
    const late = step.tUs - beganUs - 2 * US_PER_S;
    const risen =
      spec.joinShare + (1 - spec.joinShare) * clamp((step.tUs - beganUs - 2 * US_PER_S) / (4 * US_PER_S), 0, 1);
    const { share } = before.met;
    const opened = share + (1 - share) * Math.min((step.tUs - before.met.tUs) / US_PER_S, 1);
    const away = spec.joints.map((_, j) => Math.abs((step.target[j] as number) - (before.motion[j] as Motion).x));
    const longestS = Math.max(
      0,
      ...spec.joints.map((joint, j) => (step.held[j] ? 0 : (away[j] as number) / joint.speedRadS)),
    );
    const speeds = spec.joints.map((joint, j) => {
      if (state === 'following') return opened * joint.speedRadS;
      return (
        risen * (longestS > 0 ? Math.min(joint.speedRadS, ((away[j] as number) + 1e-6) / longestS) : joint.speedRadS)
      );
    });
    const motion = before.motion.map((from, j) => {
      const { accelRadS2 } = spec.joints[j] as FollowerJointSpec;
      if (step.held[j]) return braked(from, accelRadS2, dtS);
      return moved(from, step.target[j] as number, speeds[j] as number, accelRadS2, dtS);
    });
    const limits = step.limits.map((limit, j) => {
      const fast = Math.abs((motion[j] as Motion).v) >= 0.999 * (speeds[j] as number);
      return fast && (motion[j] as Motion).v !== 0 ? `${limit} speed` : limit;
    });
    const meets =
      state === 'joining' &&
      motion.every(({ x, v }, j) => {
        const lag = late > 0 ? (0.5 * v * v) / (spec.joints[j] as FollowerJointSpec).accelRadS2 : 0;
        return step.held[j] || Math.abs((step.target[j] as number) - x) <= Math.PI / 180 + lag;
      });
    const met = meets ? { tUs: step.tUs, share: risen } : before.met;
    return { ...step, motion, limits, beganUs, met, state: meets ? 'following' : state };
  };
}

function braked({ x, v }: Motion, accel: number, dtS: number): Motion {
  const sign = v < 0 ? -1 : 1;
  const t = Math.min(dtS, Math.abs(v) / accel);
  return { x: x + v * t - 0.5 * sign * accel * t * t, v: t < dtS ? 0 : v - sign * accel * t };
}

/** The governor's formula, as in `follower/governor`. */
function moved({ x, v }: Motion, target: number, W: number, A: number, dtS: number): Motion {
  const e = target - x;
  const past = e - (0.5 * v * Math.abs(v)) / A;
  const s = past > 0 ? 1 : past < 0 ? -1 : v < 0 ? -1 : 1;
  const D = s * e;
  const u = s * v;
  const peak = u > W ? W : Math.max(u, Math.min(W, Math.sqrt(Math.max(0, A * D + 0.5 * u * u))));
  const a = Math.sign(peak - u) * A;
  const t1 = Math.abs(peak - u) / A;
  const d1 = 0.5 * (u + peak) * t1;
  const left = D - d1;
  const t2 = peak > 0 ? Math.max(0, left - (0.5 * peak * peak) / A) / peak : left > 1e-12 ? Infinity : 0;
  const T = t1 + t2 + peak / A;
  if (dtS <= t1) return { x: x + s * (u * dtS + 0.5 * a * dtS * dtS), v: s * (u + a * dtS) };
  if (dtS <= t1 + t2) return { x: x + s * (d1 + peak * (dtS - t1)), v: s * peak };
  const rest = T - dtS;
  if (rest > 0) return { x: x + s * (D - 0.5 * A * rest * rest), v: s * A * rest };
  return { x: target, v: 0 };
}

export interface Pulses {
  readonly channels: readonly number[];
  readonly pulsesUs: readonly number[];
}

export function pulsed(spec: FollowerSpec) {
  return ({ motion }: FollowerFlow): Pulses => ({
    channels: spec.servos.map((servo) => servo.channel),
    pulsesUs: spec.servos.map((servo) =>
      servo.map.value(servo.turns.reduce((sum, turn) => sum + turn.weight * (motion[turn.joint] as Motion).x, 0)),
    ),
  });
}

export interface Sent {
  readonly sequence: number;
  readonly bytes: Uint8Array;
}

export function encoded(spec: FollowerSpec) {
  const lowUs = spec.servos.map((servo) => servo.map.yMin);
  const highUs = spec.servos.map((servo) => servo.map.yMax);
  return (before: Sent, { channels, pulsesUs }: Pulses): Sent => {
    const sequence = (before.sequence + 1) & 0xff;
    const payload = new Uint8Array(HOST_HEAD + channels.length * SERVO_BYTES + 2);
    payload.set([FROM_HOST.command, sequence]);
    channels.forEach((channel, k) => {
      const steps = Math.round(
        clamp(pulsesUs[k] as number, lowUs[k] as number, highUs[k] as number) * PULSE_STEPS_PER_US,
      );
      payload.set([channel, steps & 0xff, steps >>> 8], HOST_HEAD + k * SERVO_BYTES);
    });
    const bytes = new Uint8Array(commandBytes(channels.length));
    return { sequence, bytes: bytes.subarray(0, seal(payload, payload.length - 2, bytes, 0)) };
  };
}

function clamp(value: number, low: number, high: number): number {
  return Math.min(Math.max(value, low), high);
}
