import { US_PER_S } from '../../src/clock/clock.ts';
import type { Plan } from '../../src/drive/plan.ts';
import { commandBytes, FROM_HOST, HOST_HEAD, SERVO_BYTES, seal } from '../../src/wire/frames-layout.ts';
import { JOINTS, PERIOD_US, START_US } from './scene.ts';
import type { TightLeader } from './tight-leader.ts';
import { IN_DEADBAND, IN_RANGE, SICK, tightMotion } from './tight-motion.ts';
import { tightServos } from './tight-servos.ts';

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
const KEEP_ALIVE_US = 500_000;
const PATIENCE_US = 2 * US_PER_S;
const MET_RAD = Math.PI / 180;
const CLOSE_RAD = 1e-6;
const N = JOINTS;

/** A pose to every follower's bytes. Rows f N to f N + N of each table are the joints of follower f. */
export function tightFollowers(plan: Plan, lead: TightLeader): TightFollowers {
  const F = plan.followers.length;
  const joints = plan.followers.flatMap((spec) => spec.joints);
  const offset = Float64Array.from(joints, (j) => (j.sources.length === 0 ? j.restRad : j.offsetRad));
  const sources = joints.map((j) => j.sources);
  const first = Uint16Array.from(joints.keys(), (i) => sources.slice(0, i).flat().length);
  const end = Uint16Array.from(joints, (j, i) => (first[i] as number) + j.sources.length);
  const from = Uint16Array.from(sources.flat(), (s) => s.joint);
  const weight = Float64Array.from(joints.flatMap((j) => j.sources.map((s) => j.gain * s.weight)));
  const clutch = new Float64Array(F * N);
  const wanted = Float64Array.from(joints, (j) => j.restRad);
  const deadband = Float64Array.from(joints, (j) => j.deadbandRad);
  const top = Float64Array.from(joints, (j) => j.speedRadS);
  const { x, v, target, speed, accel, min, max, held, braking, limits, govern } = tightMotion(joints);
  const { steps, turn } = tightServos(plan, x);
  const channel = Uint8Array.from(plan.followers.flatMap((spec) => spec.servos.map((servo) => servo.channel)));

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
  const pace = new Float64Array([plan.pace]);
  // A number handed over in a call would be boxed.
  const dtS = new Float64Array(1);
  const dueUs = new Float64Array([START_US - PERIOD_US + KEEP_ALIVE_US]);
  let commands = 0;

  const noteHealth = (f: number): void => {
    let freed = false;
    for (let i = f * N; i < f * N + N; i++) {
      let sick = 0;
      for (let k = first[i] as number; k < (end[i] as number); k++) if (lead.health[from[k] as number] !== 0) sick = 1;
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
    const least = joinShare[f] as number;
    const late = (nowUs[0] as number) - (beganUs[f] as number) - PATIENCE_US;
    return least + (1 - least) * Math.min(Math.max(late / (4 * US_PER_S), 0), 1);
  };

  const want = (f: number): void => {
    for (let i = f * N; i < f * N + N; i++) {
      let wish = target[i] as number;
      if (held[i] === 0) {
        wish = offset[i] as number;
        for (let k = first[i] as number; k < (end[i] as number); k++)
          wish += (weight[k] as number) * (lead.poseRad[from[k] as number] as number);
        wish += clutch[i] as number;
      }
      const d = deadband[i] as number;
      const low = min[i] as number;
      const high = max[i] as number;
      const trailing = Math.min(Math.max(target[i] as number, wish - d), wish + d);
      const cut = trailing < low ? low : trailing > high ? high : trailing;
      wanted[i] = wish;
      target[i] = cut;
      braking[i] = held[i] as number;
      limits[i] = (cut !== trailing ? IN_RANGE : cut !== wish ? IN_DEADBAND : 0) | (held[i] === 1 ? SICK : 0);
    }
  };

  const limitSpeed = (f: number): void => {
    const base = f * N;
    if (state[f] === FOLLOWING) {
      const least = shareAtMeeting[f] as number;
      const open = Math.min(((nowUs[0] as number) - (metUs[f] as number)) / US_PER_S, 1);
      const share = (least + (1 - least) * open) * (pace[0] as number);
      for (let i = base; i < base + N; i++) speed[i] = share * (top[i] as number);
      return;
    }
    const share = risen(f) * (pace[0] as number);
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
      outgoing[at] = channel[i] as number;
      outgoing[at + 1] = (steps[i] as number) & 0xff;
      outgoing[at + 2] = (steps[i] as number) >>> 8;
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
    if (state[f] === HOLDING) for (let i = f * N; i < f * N + N; i++) braking[i] = 1;
    else {
      want(f);
      limitSpeed(f);
    }
    dtS[0] = Math.min(sinceUs, 2 * PERIOD_US) / US_PER_S;
    moving[f] = govern(f * N, f * N + N, dtS) ? 1 : 0;
    if (state[f] === JOINING && met(f)) {
      state[f] = FOLLOWING;
      owed[f] = 1;
      metUs[f] = now;
      shareAtMeeting[f] = risen(f);
    }
    lastUs[f] = now;
    readingAgeUs[f] = now - (lead.lastUs[0] as number);
    turn(f * N, f * N + N);
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
