import type { DriveEvent } from '../../src/drive/events.ts';
import { ALL, LEADER } from '../../src/drive/events.ts';
import type { Plan } from '../../src/drive/plan.ts';
import type { FollowerSpec } from '../../src/follower/spec.ts';
import { type Accepted, motionFaults } from '../motion-laws.ts';
import type { Happened, Told } from './rehearsal.ts';

/** All that a drive did, as a list: what happened to it, and the commands that its ports took. */
export interface Record {
  readonly plan: Plan;
  /** The board each follower hangs on. */
  readonly boardOf: readonly number[];
  /** How long boards are busy with one command. */
  readonly busyUs: number;
  readonly happened: readonly Happened[];
  readonly told: readonly Told[];
}

/** Every invariant of the design that a drive breaks, in words; none: it is lawful. */
export function driveFaults(record: Record): string[] {
  return record.plan.followers.flatMap((spec, follower) => {
    const told = record.told.filter((each) => each.follower === follower);
    return [
      ...pulseFaults(spec, told),
      ...unbroken(spec, told).flatMap((sequence) => motionFaults(sequence, spec.joints)),
      ...rateFaults(spec, told),
      ...staleFaults(record, follower),
      ...latchFaults(record, follower),
      ...delayFaults(record, follower),
    ].map((fault) => `${spec.name}: ${fault}`);
  });
}

const pulsing = (spec: FollowerSpec, told: Told): boolean =>
  told.kind === 'move' && told.pulsing === spec.servos.length;

/** Pulses stay inside the span of their servo's points. */
function pulseFaults(spec: FollowerSpec, told: readonly Told[]): string[] {
  const jogged = (each: Told): boolean => each.state === 'jogging' || each.kind !== 'move';
  return told.flatMap((each) =>
    spec.servos.flatMap(({ map }, k) => {
      const pulse = each.pulsesUs[k] as number;
      const inside = pulse >= map.yMin - 1e-6 && pulse <= map.yMax + 1e-6;
      return Number.isFinite(pulse) && (inside || jogged(each))
        ? []
        : [`servo ${k} was told ${pulse} us at ${each.tUs} us`];
    }),
  );
}

/** Commands between two wakes: each wake starts a new sequence, at the pose in which all servos have their pulses. */
function unbroken(spec: FollowerSpec, told: readonly Told[]): Accepted[][] {
  const sequences: Accepted[][] = [];
  let open = false;
  for (const each of told) {
    if (!pulsing(spec, each)) open = false;
    else {
      if (!open || each.waking) sequences.push([]);
      open = true;
      sequences.at(-1)?.push(each);
    }
  }
  return sequences;
}

/** No arm is told more often than a tenth of a period early. */
function rateFaults(spec: FollowerSpec, told: readonly Told[]): string[] {
  return unbroken(spec, told).flatMap((moves) =>
    moves.slice(1).flatMap((each, i) => {
      const gapUs = each.tUs - (moves[i] as Told).tUs;
      return gapUs < 0.9 * spec.periodUs - 1e-6 ? [`told after ${gapUs} us at ${each.tUs} us`] : [];
    }),
  );
}

/** Once what leads is too old the arm only gets slower; parking that was asked for without a leader is no such motion. */
function staleFaults(record: Record, follower: number): string[] {
  const { told, happened, plan } = record;
  const heard = new Heard(plan.leader.joints.length);
  const mine: { each: Told; stale: boolean; isSentHome: boolean }[] = [];
  let isSentHome = false;
  let seen = 0;
  for (const { event, told: upTo } of happened) {
    heard.hears(event);
    const stale = event.tUs - heard.lastUs > plan.leader.timeoutUs;
    // A short way home may be gone, and the arm be at rest, within one command.
    isSentHome ||= isKey(event, follower, ['park', 'limp']);
    for (const each of told.slice(seen, upTo)) {
      if (each.follower !== follower) continue;
      mine.push({ each, stale, isSentHome });
      isSentHome = false;
    }
    seen = upTo;
  }
  return mine.flatMap(({ each, stale, isSentHome: toRest }, i) => {
    const before = mine[i - 1];
    const first = mine[i - 2];
    if (before === undefined || first === undefined || !stale || !before.stale) return [];
    if (toRest || each.state === 'parking' || before.each.state === 'parking' || each.kind !== 'move') return [];
    const fasterAt = each.anglesRad.findIndex((_, j) => {
      const speed = speedBetween(before.each, each, j);
      return Math.abs(speed) > Math.abs(speedBetween(first.each, before.each, j)) + 1e-9;
    });
    return fasterAt < 0 ? [] : [`joint ${fasterAt} sped up at ${each.tUs} us with readings too old`];
  });
}

/** Mean speed of a joint between two commands, rad/s. */
function speedBetween(a: Told, b: Told, j: number): number {
  return ((b.anglesRad[j] as number) - (a.anglesRad[j] as number)) / ((b.tUs - a.tUs) / 1e6);
}

/** When what leads was last heard of: the hand, a take, or the older of both where they share the joints. */
class Heard {
  lastUs = Number.NEGATIVE_INFINITY;
  #handUs = Number.NEGATIVE_INFINITY;
  #takeUs = Number.NEGATIVE_INFINITY;
  #posed: Uint8Array;
  #targets = false;

  constructor(joints: number) {
    this.#posed = new Uint8Array(joints);
  }

  hears(event: DriveEvent): void {
    const isTake = event.kind === 'target' || (event.kind === 'pose' && this.#posed.includes(1));
    if (isTake) this.#takeUs = event.tUs;
    else if (event.kind === 'reading' || event.kind === 'pose') this.#handUs = event.tUs;
    else if (event.kind === 'down' && event.follower === LEADER) this.#handUs = Number.NEGATIVE_INFINITY;
    else if (event.kind === 'lead') {
      this.#posed = event.posed;
      this.#targets = event.targets;
    }
    const onlyTake = this.#targets || !this.#posed.includes(0);
    const onlyHand = !this.#targets && !this.#posed.includes(1);
    this.lastUs = onlyHand ? this.#handUs : onlyTake ? this.#takeUs : Math.min(this.#handUs, this.#takeUs);
  }
}

/** After a stop, once it stands, nothing moves until `rearm`, and then a key that asks for motion. */
function latchFaults({ happened, told }: Record, follower: number): string[] {
  const faults: string[] = [];
  let latched = false;
  let rearmed = false;
  let stood = false;
  let angles: Float64Array | null = null;
  let seen = 0;
  for (const { event, states, told: upTo } of happened) {
    if (latched && states[follower] !== 'stopped' && !rearmed) {
      if (!isKey(event, follower, ['rearm'])) faults.push(`left its stop by ${event.kind} at ${event.tUs} us`);
      rearmed = true;
    } else if (rearmed && isKey(event, follower, ['go', 'join', 'park', 'limp'])) latched = rearmed = false;
    for (const each of told.slice(seen, upTo)) {
      if (each.follower !== follower || each.kind !== 'move') continue;
      if (latched && stood && angles !== null && !each.anglesRad.every((x, j) => x === (angles as Float64Array)[j]))
        faults.push(`moved while it was stopped at ${each.tUs} us`);
      angles = each.anglesRad;
      stood = !each.moving;
    }
    seen = upTo;
    if (states[follower] === 'stopped') {
      latched = true;
      rearmed = false;
    }
  }
  return faults;
}

/** A moving arm is told again within its period, whatever the ports of the others do; boards that take a while are let off. */
function delayFaults(record: Record, follower: number): string[] {
  if (record.busyUs > 0) return [];
  // Under a take's commands a tenth of the period may pass in waiting for the next one.
  const latestUs = Math.ceil(1.1 * (record.plan.followers[follower] as FollowerSpec).periodUs);
  const faults: string[] = [];
  let movingSinceUs = Number.POSITIVE_INFINITY;
  let seen = 0;
  for (const { event, told } of record.happened) {
    if (event.tUs - movingSinceUs > latestUs)
      faults.push(`was kept waiting from ${movingSinceUs} us to ${event.tUs} us`);
    if (isOfBoard(record, event, follower)) movingSinceUs = Number.POSITIVE_INFINITY;
    // A jogged servo is no moving arm: it may be left where it is.
    for (const each of record.told.slice(seen, told))
      if (each.follower === follower)
        movingSinceUs = each.moving && each.state !== 'jogging' ? each.tUs : Number.POSITIVE_INFINITY;
    seen = told;
  }
  return faults;
}

function isOfBoard({ boardOf }: Record, event: DriveEvent, follower: number): boolean {
  const ofBoard = event.kind === 'blocked' || event.kind === 'free' || event.kind === 'down' || event.kind === 'reboot';
  return ofBoard && boardOf[event.follower] === boardOf[follower];
}

function isKey(event: DriveEvent, follower: number, keys: readonly string[]): boolean {
  return event.kind === 'key' && keys.includes(event.key) && (event.follower === ALL || event.follower === follower);
}
