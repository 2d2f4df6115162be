import { US_PER_MS, US_PER_S } from '../clock/clock.ts';
import type { TakeHeader } from './header.ts';
import type { Take } from './reader.ts';
import { copyRow, EVENT_CODES, NO_FOLLOWER, NO_KEY, type Row, row as makeRow, type RowFollower } from './row.ts';

/** Between two values further apart than this nothing is known: the earlier one is held. */
const HOLD_US = 250 * US_PER_MS;

/** Columns that change together: the leader's, or one follower's. */
interface Source {
  /** The next instant to be given a value, counted from 0. */
  next: number;
  /** When its last value came; NaN before there is one. */
  atUs: number;
}

/**
 * A take at even instants: angles, targets and speeds straight between their neighbours, everything else as it stood.
 * Marks are told by the first instant at or after them. Bounded: only instants that still wait for a value are kept.
 * @param fromUs the first instant, which becomes t_us = 0
 */
export function* resampled(take: Take, rateHz: number, fromUs = 0, toUs = take.durationUs): Generator<Row> {
  const { header } = take;
  const periodUs = US_PER_S / rateHz;
  const instants = Math.floor(((toUs - fromUs) * rateHz) / US_PER_S) + 1;
  const slots = Array.from({ length: Math.ceil(HOLD_US / periodUs) + 3 }, () => makeRow(header));
  const sources = Array.from({ length: 1 + header.followers.length }, (): Source => ({ next: 0, atUs: Number.NaN }));
  const last = nothingKnown(header);
  let made = 0;
  let given = 0;
  let name = '';

  const slotOf = (k: number): Row => slots[k % slots.length] as Row;
  const instantUs = (k: number): number => fromUs + (k * US_PER_S) / rateHz;

  const make = (): void => {
    const slot = slotOf(made);
    copyRow(last, slot);
    slot.tUs = Math.round((made * US_PER_S) / rateHz);
    slot.event = EVENT_CODES.pose;
    slot.key = NO_KEY;
    slot.follower = NO_FOLLOWER;
    slot.name = name;
    name = '';
    made++;
  };

  /** Gives source `s` its values up to the instant of `now`, or holds them where `now` is null. */
  const fill = (s: number, untilUs: number, now: Row | null): void => {
    const source = sources[s] as Source;
    for (; source.next < made && instantUs(source.next) <= untilUs; source.next++) {
      const at = instantUs(source.next);
      // Until its first value came, an instant keeps how things stood then.
      if (Number.isNaN(source.atUs) && now?.tUs !== at) continue;
      const gap = now === null ? 0 : now.tUs - source.atUs;
      const share = now === null || !(gap > 0 && gap <= HOLD_US) ? (now?.tUs === at ? 1 : 0) : (at - source.atUs) / gap;
      mix(slotOf(source.next), last, now ?? last, share, s - 1);
    }
  };

  for (const row of take.readFrom(fromUs)) {
    if (row.tUs > toUs) break;
    while (made < instants && instantUs(made) < row.tUs) {
      // The oldest instant waits no longer than its slot lasts.
      if (made - given === slots.length - 1) {
        for (let s = 0; s < sources.length; s++) fill(s, instantUs(given), null);
        yield slotOf(given++);
      }
      make();
    }
    if (row.name !== '') name = row.name;
    for (let s = 0; s < sources.length; s++) {
      const source = sources[s] as Source;
      if (!isNewFor(s - 1, row)) {
        if (row.tUs - source.atUs > HOLD_US) fill(s, row.tUs - HOLD_US, null);
        continue;
      }
      fill(s, row.tUs, row);
      source.atUs = row.tUs;
    }
    copyRow(row, last);
    const ready = Math.min(...sources.map((source) => source.next));
    while (given < ready) yield slotOf(given++);
  }
  while (given < instants) {
    if (made === given) make();
    for (let s = 0; s < sources.length; s++) fill(s, Number.POSITIVE_INFINITY, null);
    yield slotOf(given++);
  }
}

/** How things stand before the first row: nobody knows. */
function nothingKnown(header: TakeHeader): Row {
  const row = makeRow(header);
  for (const arm of row.followers)
    for (const values of [arm.angleRad, arm.targetRad, arm.speedRadS]) values.fill(Number.NaN);
  return row;
}

function isNewFor(follower: number, row: Row): boolean {
  if (follower >= 0) return row.followers[follower]?.commanded === 1;
  return row.event === EVENT_CODES.reading || row.event === EVENT_CODES.pose || row.event === EVENT_CODES.blend;
}

function mix(slot: Row, a: Row, b: Row, share: number, follower: number): void {
  if (follower < 0) {
    between(slot.poseRad, a.poseRad, b.poseRad, share);
    between(slot.counts, a.counts, b.counts, share);
    return;
  }
  const [to, from, next] = [slot, a, b].map((row) => row.followers[follower] as RowFollower) as [
    RowFollower,
    RowFollower,
    RowFollower,
  ];
  between(to.angleRad, from.angleRad, next.angleRad, share);
  between(to.targetRad, from.targetRad, next.targetRad, share);
  between(to.speedRadS, from.speedRadS, next.speedRadS, share);
}

function between(out: Float64Array, a: Float64Array, b: Float64Array, share: number): void {
  for (let i = 0; i < out.length; i++) {
    const from = a[i] as number;
    const to = b[i] as number;
    // Before the first value there is nothing to come from.
    out[i] = Number.isNaN(from) ? (share < 1 ? from : to) : share === 0 ? from : from + share * (to - from);
  }
}
