import type { Key } from '../drive/events.ts';
import { STATES } from '../follower/states.ts';
import type { TakeHeader } from './header.ts';

/** What a row tells of: an event of the drive, or something that only a take knows. A row's code is the place in this list. */
export const ROW_EVENTS = [
  'reading',
  'pose',
  'target',
  'tick',
  'key',
  'lead',
  'ready',
  'down',
  'reboot',
  'blocked',
  'free',
  'jog',
  /** A profile was edited while the take ran; `name` holds what was changed. */
  'plan',
  /** Made up between two takes, or between a take's end and its beginning. */
  'blend',
] as const;

export const ROW_KEYS = [
  'go',
  'join',
  'hold',
  'park',
  'limp',
  'stop',
  'rearm',
  'clutch',
  'pace',
  'mark',
] as const satisfies readonly Key[];

/** A name's text in UTF-8; what is longer is cut. */
export const NAME_BYTES_MAX = 16_384;
/** Code of a row that is no key. */
export const NO_KEY = 255;
/** Index of a row that is for no follower: below `ALL` and `LEADER`. */
export const NO_FOLLOWER = -3;

export const EVENT_CODES = codes(ROW_EVENTS);
export const KEY_CODES = codes(ROW_KEYS);
export const STATE_CODES = codes(STATES);

/** One event and how everything stood after it. Reused: what is read is valid until the next row. */
export interface Row {
  /** Since the beginning of the take, integer microseconds. */
  tUs: number;
  event: number;
  key: number;
  follower: number;
  kept: number;
  servo: number;
  /** Share of the speed limits for `pace`, pulse for `jog`. */
  value: number;
  /** A mark's name, or what a `plan` changed; empty otherwise. */
  name: string;
  /** Parallel to the leader board's inputs; NaN where there is no value. */
  readonly counts: Float64Array;
  /** The conditioned pose of the leader, radians; NaN before it is known. */
  readonly poseRad: Float64Array;
  readonly followers: readonly RowFollower[];
}

export interface RowFollower {
  /** 1: this event made a command. */
  commanded: number;
  state: number;
  blocks: number;
  readonly targetRad: Float64Array;
  readonly angleRad: Float64Array;
  readonly speedRadS: Float64Array;
  readonly limits: Uint8Array;
}

export function row(header: TakeHeader): Row {
  return {
    tUs: 0,
    event: 0,
    key: NO_KEY,
    follower: NO_FOLLOWER,
    kept: 0,
    servo: -1,
    value: Number.NaN,
    name: '',
    counts: new Float64Array(header.leader.inputs.length).fill(Number.NaN),
    poseRad: new Float64Array(header.leader.joints.length).fill(Number.NaN),
    followers: header.followers.map(({ joints }) => ({
      commanded: 0,
      state: 0,
      blocks: 0,
      targetRad: new Float64Array(joints.length),
      angleRad: new Float64Array(joints.length),
      speedRadS: new Float64Array(joints.length),
      limits: new Uint8Array(joints.length),
    })),
  };
}

export function copyRow(from: Row, to: Row): void {
  to.tUs = from.tUs;
  to.event = from.event;
  to.key = from.key;
  to.follower = from.follower;
  to.kept = from.kept;
  to.servo = from.servo;
  to.value = from.value;
  to.name = from.name;
  to.counts.set(from.counts);
  to.poseRad.set(from.poseRad);
  for (let f = 0; f < to.followers.length; f++) {
    const source = from.followers[f] as RowFollower;
    const sink = to.followers[f] as RowFollower;
    sink.commanded = source.commanded;
    sink.state = source.state;
    sink.blocks = source.blocks;
    sink.targetRad.set(source.targetRad);
    sink.angleRad.set(source.angleRad);
    sink.speedRadS.set(source.speedRadS);
    sink.limits.set(source.limits);
  }
}

function codes<T extends string>(words: readonly T[]): Readonly<Record<T, number>> {
  return Object.fromEntries(words.map((word, code) => [word, code])) as Record<T, number>;
}
