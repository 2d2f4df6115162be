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
  yield* stretched(take, { fromUs, toUs }, speed, startUs);
  if (loopBlendS === null) return;
  const from = momentAt(speed, endOf(take, toUs));
  const to = momentAt(speed, startOf(take, fromUs));
  for (;;) {
    yield* blended(take.header, from, to, loopBlendS, startUs + lengthUs);
    startUs += lengthUs + Math.round(loopBlendS * US_PER_S);
    yield* stretched(take, { fromUs, toUs }, speed, startUs);
  }
}

function momentAt(speed: number, moment: ReturnType<typeof endOf>): ReturnType<typeof endOf> {
  const { row, poseRadS } = moment;
  for (const values of [poseRadS, ...row.followers.map((arm) => arm.speedRadS)])
    for (let i = 0; i < values.length; i++) values[i] = (values[i] as number) * speed;
  return moment;
}
