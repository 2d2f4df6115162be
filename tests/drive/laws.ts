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
      ...staleFaults(record, told),
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

/** Once readings are too old the arm only gets slower; parking that was asked for without a leader is no such motion. */
function staleFaults(record: Record, told: readonly Told[]): string[] {
  const stale = told.map((each) => each.tUs - lastReadingUs(record.happened, each) > record.plan.leader.timeoutUs);
  return told.flatMap((each, i) => {
    const [before, first] = [told[i - 1], told[i - 2]];
    if (before === undefined || first === undefined || !stale[i] || !stale[i - 1]) return [];
    if (each.state === 'parking' || before.state === 'parking' || each.kind !== 'move') return [];
    const fasterAt = each.anglesRad.findIndex((x, j) => {
      const speed = (x - (before.anglesRad[j] as number)) / (each.tUs - before.tUs);
      const speedBefore = ((before.anglesRad[j] as number) - (first.anglesRad[j] as number)) / (before.tUs - first.tUs);
      return Math.abs(speed) > Math.abs(speedBefore) + 1e-12;
    });
    return fasterAt < 0 ? [] : [`joint ${fasterAt} sped up at ${each.tUs} us with readings too old`];
  });
}

/** Instant of the last reading or pose delivered before a command, or with it; -Infinity when the leader is down. */
function lastReadingUs(happened: readonly Happened[], command: Told): number {
  let low = 0;
  let high = happened.length - 1;
  while (low < high) {
    const middle = (low + high + 1) >>> 1;
    if ((happened[middle] as Happened).event.tUs <= command.tUs) low = middle;
    else high = middle - 1;
  }
  for (let i = low; i >= 0; i--) {
    const { event } = happened[i] as Happened;
    if (event.kind === 'reading' || event.kind === 'pose') return event.tUs;
    if (event.kind === 'down' && event.follower === LEADER) return Number.NEGATIVE_INFINITY;
  }
  return Number.NEGATIVE_INFINITY;
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
  const { periodUs } = record.plan.followers[follower] as FollowerSpec;
  const faults: string[] = [];
  let movingSinceUs = Number.POSITIVE_INFINITY;
  let seen = 0;
  for (const { event, told } of record.happened) {
    if (event.tUs - movingSinceUs > periodUs)
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
