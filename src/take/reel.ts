import { US_PER_S } from '../clock/clock.ts';
import type { Stretch } from './derive.ts';
import { blended, endOf, startOf, stretched } from './edit.ts';
import type { Take } from './reader.ts';
import type { Row } from './row.ts';

export interface ReelOptions extends Stretch {
  /** Over 0: 2 is twice as fast. */
  readonly speed: number;
  /** Over and over, its end joined to its start by a blend of this many seconds; null: once. */
  readonly loopBlendS: number | null;
}

/** A stretch of a take on the time of its playing: rows in order from t_us = 0, reused. Endless where it loops. */
export function* reel(take: Take, { fromUs, toUs, speed, loopBlendS }: ReelOptions): Generator<Row> {
  const lengthUs = Math.round((toUs - fromUs) / speed);
  let startUs = 0;
  // Looked up before anything plays: later it would have to wait for the disk.
  const seam =
    loopBlendS === null
      ? null
      : { from: momentAt(speed, endOf(take, toUs)), to: momentAt(speed, startOf(take, fromUs)), seconds: loopBlendS };
  yield* stretched(take, { fromUs, toUs }, speed, startUs);
  if (seam === null) return;
  const { from, to, seconds } = seam;
  for (;;) {
    take.fetch(fromUs, fromUs);
    yield* blended(take.header, from, to, seconds, startUs + lengthUs);
    startUs += lengthUs + Math.round(seconds * US_PER_S);
    yield* stretched(take, { fromUs, toUs }, speed, startUs);
  }
}

function momentAt(speed: number, moment: ReturnType<typeof endOf>): ReturnType<typeof endOf> {
  const { row, poseRadS } = moment;
  for (const values of [poseRadS, ...row.followers.map((arm) => arm.speedRadS)])
    for (let i = 0; i < values.length; i++) values[i] = (values[i] as number) * speed;
  return moment;
}
