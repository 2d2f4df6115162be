import { US_PER_S } from '../clock/clock.ts';
import { derive, type Derived, derivedHeader, type Stretch, type Work } from './derive.ts';
import { takeFault } from './fault.ts';
import type { TakeHeader } from './header.ts';
import { type Blend, blend } from './minimum-jerk.ts';
import type { Take } from './reader.ts';
import { copyRow, EVENT_CODES, NO_FOLLOWER, NO_KEY, type Row, row as makeRow, type RowFollower } from './row.ts';

/** Keeps one stretch of a take. */
export function trim(folder: string, name: string, take: Take, { fromUs, toUs }: Stretch): Work<Derived> {
  const header = derivedHeader([take], 'trim', { from_s: fromUs / US_PER_S, to_s: toUs / US_PER_S });
  const share = (toUs - fromUs) / take.durationUs;
  return derive(folder, name, take, header, stretched(take, { fromUs, toUs }, 1, 0), share * take.rows);
}

/**
 * Plays a take's rows faster or slower: times by 1/speed, speeds by speed (and so accelerations by speed squared).
 * @param speed over 0; 2 is twice as fast
 */
export function retime(folder: string, name: string, take: Take, speed: number): Work<Derived> {
  const header = derivedHeader([take], 'retime', { speed });
  const rows = stretched(take, { fromUs: 0, toUs: take.durationUs }, speed, 0);
  return derive(folder, name, take, header, rows, take.rows);
}

/** Follower commands a blend makes in a second, and the leader's poses. */
const BLEND_HZ = 100;
/** A pose's speed is told from this stretch of it: shorter is only the converter's noise. */
const SLOPE_US = 50_000;

/** Joins two takes of the same joints by a minimum-jerk blend of `seconds`, from the end of the one to the start of the other. */
export function splice(folder: string, name: string, first: Take, second: Take, seconds: number): Work<Derived> {
  const header = derivedHeader([first, second], 'splice', { blend_s: seconds });
  const strange = strangeness(first.header, second.header);
  if (strange !== null) return refused(takeFault('TAKE_UNFIT', second.name, strange));
  const expected = first.rows + second.rows + seconds * BLEND_HZ;
  return derive(folder, name, first, header, spliced(first, second, seconds), expected);
}

function* refused<T>(fault: T): Generator<number, T> {
  yield 1;
  return fault;
}

function* spliced(first: Take, second: Take, seconds: number): Generator<Row> {
  const whole = (take: Take): Stretch => ({ fromUs: 0, toUs: take.durationUs });
  yield* stretched(first, whole(first), 1, 0);
  const from = endOf(first);
  const to = startOf(second);
  yield* blended(first.header, from, to, seconds, first.durationUs);
  yield* stretched(second, whole(second), 1, first.durationUs + Math.round(seconds * US_PER_S));
}

/** A moment with its speeds: where a blend begins or ends. */
export interface Moment {
  readonly row: Row;
  /** rad/s, of the leader's joints. */
  readonly poseRadS: Float64Array;
}

/** Rows from one moment to another, none at either end itself. */
export function* blended(
  header: TakeHeader,
  from: Moment,
  to: Moment,
  seconds: number,
  startUs: number,
): Generator<Row> {
  const row = makeRow(header);
  copyRow(from.row, row);
  row.event = EVENT_CODES.blend;
  row.key = NO_KEY;
  row.follower = NO_FOLLOWER;
  row.name = '';
  row.counts.fill(Number.NaN);
  const ways = (x0: Float64Array, v0: Float64Array, x1: Float64Array, v1: Float64Array): Blend[] =>
    Array.from(x0, (x, j) => blend(x, v0[j] as number, x1[j] as number, v1[j] as number, seconds));
  const poses = ways(from.row.poseRad, from.poseRadS, to.row.poseRad, to.poseRadS);
  const arms = from.row.followers.map((arm, f) => {
    const next = to.row.followers[f] as RowFollower;
    return ways(arm.angleRad, arm.speedRadS, next.angleRad, next.speedRadS);
  });
  const steps = Math.max(1, Math.round(seconds * BLEND_HZ));
  for (let k = 1; k < steps; k++) {
    const s = (k * seconds) / steps;
    row.tUs = startUs + Math.round(s * US_PER_S);
    poses.forEach((way, j) => {
      row.poseRad[j] = way.at(s);
    });
    arms.forEach((joints, f) => {
      const arm = row.followers[f] as RowFollower;
      arm.commanded = 1;
      joints.forEach((way, j) => {
        arm.angleRad[j] = way.at(s);
        arm.targetRad[j] = way.at(s);
        arm.speedRadS[j] = way.speed(s);
      });
    });
    yield row;
  }
}

/** How a take stands at its end. */
export function endOf(take: Take, atUs = take.durationUs): Moment {
  return momentOf(take, atUs, Math.max(0, atUs - SLOPE_US), atUs);
}

/** How a take stands at its start: where every joint of the leader is known for the first time. */
export function startOf(take: Take, atUs = 0): Moment {
  return momentOf(take, atUs, atUs, atUs + SLOPE_US);
}

function momentOf(take: Take, atUs: number, fromUs: number, toUs: number): Moment {
  const row = makeRow(take.header);
  const early = makeRow(take.header);
  const late = makeRow(take.header);
  let found = false;
  let begun = false;
  for (const next of take.readFrom(fromUs)) {
    const isKnown = !next.poseRad.includes(Number.NaN);
    if (begun && isKnown && next.tUs > toUs) break;
    if (isKnown || !begun) copyRow(next, late);
    if (!begun && next.tUs >= fromUs && isKnown) {
      copyRow(next, early);
      begun = true;
    }
    if (next.tUs <= atUs || !found) {
      copyRow(next, row);
      found = isKnown;
    }
  }
  const seconds = (late.tUs - early.tUs) / US_PER_S;
  const poseRadS = Float64Array.from(row.poseRad, (_, j) =>
    begun && seconds > 0 ? ((late.poseRad[j] as number) - (early.poseRad[j] as number)) / seconds : 0,
  );
  return { row, poseRadS };
}

/** Rows of a stretch, on a time of their own. */
export function* stretched(take: Take, { fromUs, toUs }: Stretch, speed: number, startUs: number): Generator<Row> {
  for (const row of take.readFrom(fromUs)) {
    if (row.tUs < fromUs) continue;
    if (row.tUs > toUs) return;
    row.tUs = startUs + Math.round((row.tUs - fromUs) / speed);
    if (speed !== 1) for (const arm of row.followers) scale(arm.speedRadS, speed);
    yield row;
  }
}

function scale(values: Float64Array, by: number): void {
  for (let i = 0; i < values.length; i++) values[i] = (values[i] as number) * by;
}

/** The first joint that two takes do not have in common, as a sentence; null: they have the same. */
function strangeness(a: TakeHeader, b: TakeHeader): string | null {
  const names = ({ leader, followers }: TakeHeader): string[] => [
    ...leader.inputs.map((input) => `leader input ${input}`),
    ...leader.joints.map((joint) => `leader joint ${joint}`),
    ...followers.flatMap(({ name, joints }) => joints.map((joint) => `${name}.${joint.name}`)),
  ];
  const [left, right] = [names(a), names(b)];
  const missing = left.find((name) => !right.includes(name));
  if (missing !== undefined) return `it has no ${missing}`;
  const more = right.find((name) => !left.includes(name));
  if (more !== undefined) return `it has ${more}, which the other take has not`;
  return left.every((name, i) => name === right[i]) ? null : 'its joints stand in another order';
}
