import { US_PER_S } from '../../src/clock/clock.ts';
import type { Plan } from '../../src/drive/plan.ts';
import {
  commandBytes,
  FROM_HOST,
  HOST_HEAD,
  PULSE_STEPS_PER_US,
  SERVO_BYTES,
  seal,
} from '../../src/wire/frames-layout.ts';
import { JOINTS, PERIOD_US, SERVO_POINTS, START_US } from './scene.ts';
import type { TightLeader } from './tight-leader.ts';

export interface TightFollowers {
  readonly nowUs: Float64Array;
  readonly dueUs: Float64Array;
  /** Every follower takes one event: a reading, or an instant at which something was due. */
  step(reading: boolean): void;
  sent(f: number): Uint8Array;
  commands(): number;
}

const JOINING = 0;
const FOLLOWING = 1;
const HOLDING = 2;
const IN_RANGE = 1;
const AT_SPEED = 2;
const IN_DEADBAND = 4;
const SICK = 8;
const KEEP_ALIVE_US = 500_000;
const PATIENCE_US = 2 * US_PER_S;
const MET_RAD = Math.PI / 180;
const CLOSE_RAD = 1e-6;
const ROUNDING_RAD = 1e-9;
const N = JOINTS;

/** A pose to every follower's bytes. Row f of each table holds the joints of follower f. */
export function tightFollowers(plan: Plan, lead: TightLeader): TightFollowers {
  const F = plan.followers.length;
  const joints = plan.followers.flatMap((spec) => spec.joints);
  const table = (of: (joint: (typeof joints)[number]) => number): Float64Array => Float64Array.from(joints, of);
  const from = Uint16Array.from(joints, (j) => j.sources[0]?.joint as number);
  const weight = table((j) => j.gain * (j.sources[0]?.weight as number));
  const offset = table((j) => j.offsetRad);
  const min = table((j) => j.minRad);
  const max = table((j) => j.maxRad);
  const deadband = table((j) => j.deadbandRad);
  const top = table((j) => j.speedRadS);
  const accel = table((j) => j.accelRadS2);
  const channel = Uint8Array.from(plan.followers.flatMap((spec) => spec.servos.map((servo) => servo.channel)));
  const [[x0, y0], [x1, y1]] = SERVO_POINTS;
  const usPerRad = (y1 - y0) / (x1 - x0);
  const low = Math.ceil(y0 * PULSE_STEPS_PER_US - 1e-6);
  const high = Math.floor(y1 * PULSE_STEPS_PER_US + 1e-6);

  const x = table((j) => Math.min(Math.max(j.restRad, j.minRad), j.maxRad));
  const v = new Float64Array(F * N);
  const target = Float64Array.from(x);
  const wanted = table((j) => j.restRad);
  const speed = new Float64Array(F * N);
  const clipped = new Uint8Array(F * N);
  const held = new Uint8Array(F * N);
  const limits = new Uint8Array(F * N);
  const pulsesUs = new Float64Array(F * N);
  const sentUs = new Float64Array(F * N);

  const joinShare = Float64Array.from(plan.followers, (spec) => spec.joinShare);
  const state = new Uint8Array(F).fill(JOINING);
  const owed = new Uint8Array(F);
  const moving = new Uint8Array(F);
  const lastUs = new Float64Array(F).fill(START_US - PERIOD_US);
  const beganUs = new Float64Array(F).fill(START_US);
  const metUs = new Float64Array(F);
  const shareAtMeeting = new Float64Array(F);
  const readingAgeUs = new Float64Array(F);
  const sequence = new Uint8Array(F);
  const out = plan.followers.map(() => new Uint8Array(commandBytes(N)));
  const lengths = new Uint16Array(F);
  const outgoing = new Uint8Array(HOST_HEAD + N * SERVO_BYTES + 2);

  const nowUs = new Float64Array([START_US]);
  const dtS = new Float64Array(1);
  const dueUs = new Float64Array([START_US - PERIOD_US + KEEP_ALIVE_US]);
  let commands = 0;

  const noteHealth = (f: number): void => {
    let freed = false;
    for (let i = f * N; i < f * N + N; i++) {
      const sick = lead.health[from[i] as number] === 0 ? 0 : 1;
      if (held[i] === 1 && sick === 0) freed = true;
      held[i] = sick;
    }
    owed[f] = 1;
    if (freed && state[f] === FOLLOWING) join(f);
  };

  const join = (f: number): void => {
    state[f] = JOINING;
    owed[f] = 1;
    beganUs[f] = nowUs[0] as number;
    for (let i = f * N; i < f * N + N; i++) target[i] = x[i] as number;
  };

  const risen = (f: number): number => {
    const from = joinShare[f] as number;
    const late = (nowUs[0] as number) - (beganUs[f] as number) - PATIENCE_US;
    return from + (1 - from) * Math.min(Math.max(late / (4 * US_PER_S), 0), 1);
  };

  const want = (f: number): void => {
    for (let i = f * N; i < f * N + N; i++) {
      const wish =
        held[i] === 1
          ? (target[i] as number)
          : (offset[i] as number) + (weight[i] as number) * (lead.poseRad[from[i] as number] as number);
      const d = deadband[i] as number;
      const trailing = Math.min(Math.max(target[i] as number, wish - d), wish + d);
      const cut =
        trailing < (min[i] as number)
          ? (min[i] as number)
          : trailing > (max[i] as number)
            ? (max[i] as number)
            : trailing;
      wanted[i] = wish;
      target[i] = cut;
      clipped[i] = cut === trailing ? 0 : 1;
      limits[i] = (clipped[i] === 1 ? IN_RANGE : cut === wish ? 0 : IN_DEADBAND) | (held[i] === 1 ? SICK : 0);
    }
  };

  const limitSpeed = (f: number): void => {
    const base = f * N;
    if (state[f] === FOLLOWING) {
      const from = shareAtMeeting[f] as number;
      const share = from + (1 - from) * Math.min(((nowUs[0] as number) - (metUs[f] as number)) / US_PER_S, 1);
      for (let i = base; i < base + N; i++) speed[i] = share * (top[i] as number);
      return;
    }
    const share = risen(f);
    let longestS = 0;
    for (let i = base; i < base + N; i++) {
      const away = Math.abs((target[i] as number) - (x[i] as number)) / (top[i] as number);
      if (held[i] === 0 && away > longestS) longestS = away;
    }
    for (let i = base; i < base + N; i++) {
      const away = Math.abs((target[i] as number) - (x[i] as number)) + CLOSE_RAD;
      speed[i] = share * (longestS > 0 ? Math.min(top[i] as number, away / longestS) : (top[i] as number));
    }
  };

  const govern = (f: number): void => {
    // A number handed over in a call would be boxed.
    const dt = dtS[0] as number;
    const braking = state[f] === HOLDING;
    let stirs = 0;
    for (let i = f * N; i < f * N + N; i++) {
      const A = accel[i] as number;
      const from = x[i] as number;
      const v0 = v[i] as number;
      if (braking || held[i] === 1) {
        const sign = v0 < 0 ? -1 : 1;
        const t = Math.min(dt, Math.abs(v0) / A);
        x[i] = from + v0 * t - 0.5 * sign * A * t * t;
        v[i] = t < dt ? 0 : v0 - sign * A * t;
      } else {
        const e = (target[i] as number) - from;
        const past = e - (0.5 * v0 * Math.abs(v0)) / A;
        const s = past > 0 ? 1 : past < 0 ? -1 : v0 < 0 ? -1 : 1;
        const D = s * e;
        const u = s * v0;
        const W = speed[i] as number;
        const peak = u > W ? W : Math.max(u, Math.min(W, Math.sqrt(Math.max(0, A * D + 0.5 * u * u))));
        const a = peak > u ? A : peak < u ? -A : 0;
        const t1 = Math.abs(peak - u) / A;
        const d1 = 0.5 * (u + peak) * t1;
        const left = D - d1;
        const t2 =
          peak > 0 ? Math.max(0, left - (0.5 * peak * peak) / A) / peak : left > 1e-12 ? Number.POSITIVE_INFINITY : 0;
        const T = t1 + t2 + peak / A;
        if (dt <= t1) {
          x[i] = from + s * (u * dt + 0.5 * a * dt * dt);
          v[i] = s * (u + a * dt);
        } else if (dt <= t1 + t2) {
          x[i] = from + s * (d1 + peak * (dt - t1));
          v[i] = s * peak;
        } else if (dt < T) {
          const rest = T - dt;
          x[i] = from + s * (D - 0.5 * A * rest * rest);
          v[i] = s * A * rest;
        } else {
          x[i] = target[i] as number;
          v[i] = 0;
        }
        if (v[i] !== 0 && Math.abs(v[i] as number) >= 0.999 * W) limits[i] = (limits[i] as number) | AT_SPEED;
      }
      const at = x[i] as number;
      if (!(at >= (min[i] as number) - ROUNDING_RAD && at <= (max[i] as number) + ROUNDING_RAD))
        throw new RangeError('left its range');
      if (v[i] !== 0) stirs = 1;
      pulsesUs[i] = at <= x0 ? y0 : at >= x1 ? y1 : y0 + (at - x0) * usPerRad;
    }
    moving[f] = stirs;
  };

  const met = (f: number): boolean => {
    const late = (nowUs[0] as number) - (beganUs[f] as number) > PATIENCE_US;
    for (let i = f * N; i < f * N + N; i++) {
      const lag = late ? (0.5 * (v[i] as number) * (v[i] as number)) / (accel[i] as number) : 0;
      if (held[i] === 0 && Math.abs((target[i] as number) - (x[i] as number)) > MET_RAD + lag) return false;
    }
    return true;
  };

  const encode = (f: number): void => {
    outgoing[0] = FROM_HOST.command;
    outgoing[1] = sequence[f] as number;
    sequence[f] = (sequence[f] as number) + 1;
    let at = HOST_HEAD;
    for (let i = f * N; i < f * N + N; i++) {
      const rounded = Math.round((pulsesUs[i] as number) * PULSE_STEPS_PER_US);
      const steps = rounded < low ? low : rounded > high ? high : rounded;
      sentUs[i] = steps / PULSE_STEPS_PER_US;
      outgoing[at] = channel[i] as number;
      outgoing[at + 1] = steps & 0xff;
      outgoing[at + 2] = steps >>> 8;
      at += SERVO_BYTES;
    }
    lengths[f] = seal(outgoing, at, out[f] as Uint8Array, 0);
  };

  const command = (f: number, reading: boolean): void => {
    const now = nowUs[0] as number;
    const sinceUs = now - (lastUs[f] as number);
    if (sinceUs < PERIOD_US * (reading ? 0.9 : 1)) return;
    if (owed[f] === 0 && moving[f] === 0 && sinceUs < KEEP_ALIVE_US) return;
    owed[f] = 0;
    if (state[f] !== HOLDING) {
      want(f);
      limitSpeed(f);
    }
    dtS[0] = Math.min(sinceUs, 2 * PERIOD_US) / US_PER_S;
    govern(f);
    if (state[f] === JOINING && met(f)) {
      state[f] = FOLLOWING;
      owed[f] = 1;
      metUs[f] = now;
      shareAtMeeting[f] = risen(f);
    }
    lastUs[f] = now;
    readingAgeUs[f] = now - (lead.lastUs[0] as number);
    encode(f);
    commands++;
  };

  return {
    nowUs,
    dueUs,
    step(reading) {
      const stale = lead.flags[0] === 1;
      const changed = lead.flags[1] === 1;
      let due = Number.POSITIVE_INFINITY;
      for (let f = 0; f < F; f++) {
        if (reading) owed[f] = 1;
        if (changed) noteHealth(f);
        if (stale && state[f] !== HOLDING) {
          state[f] = HOLDING;
          owed[f] = 1;
        } else if (!stale && state[f] === HOLDING) join(f);
        command(f, reading);
        due = Math.min(due, (lastUs[f] as number) + (owed[f] === 1 || moving[f] === 1 ? PERIOD_US : KEEP_ALIVE_US));
      }
      dueUs[0] = due;
    },
    sent: (f) => (out[f] as Uint8Array).subarray(0, lengths[f]),
    commands: () => commands,
  };
}
