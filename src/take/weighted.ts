import { reachM } from '../arm/extent.ts';
import { US_PER_S } from '../clock/clock.ts';
import type { Plan } from '../drive/plan.ts';
import { type Asked, askedOf } from './asked.ts';
import type { Cast } from './cast.ts';
import type { Stretch } from './derive.ts';
import { takeFault, type TakeFault } from './fault.ts';
import { takeHeader } from './header.ts';
import type { Take } from './reader.ts';
import { resampled } from './resample.ts';
import { EVENT_CODES, type Row, row as makeRow, type RowFollower } from './row.ts';

const RATE_HZ = 100;

/**
 * How much longer each follower takes over a motion, so that a large arm moves with the weight it has: the root of its
 * size over the leader's (or the smallest follower's, where the leader's is not known), as a pendulum's period goes with
 * the root of its length (Froude scaling of time under gravity).
 */
export function weights(take: Take, plan: Plan): readonly number[] | TakeFault {
  const reaches = plan.followers.map((spec) => (spec.whole === undefined ? Number.NaN : reachM(spec.whole.arm)));
  const lacking = plan.followers.find((_, f) => Number.isNaN(reaches[f]));
  if (lacking !== undefined)
    return takeFault('TAKE_ARM', take.name, `${lacking.name} has no arm: in its file, so its size is not known`);
  const leader = take.header.leader.arm;
  const size = leader === null ? Math.min(...reaches) : reachM(leader);
  return reaches.map((reach) => timeScale(reach / size));
}

/** @param scale follower lengths for one of the leader's */
export function timeScale(scale: number): number {
  return Math.sqrt(scale);
}

/**
 * A stretch of a take as commands for each follower on its own time: rows whose followers are the rig's, in order of
 * time. Each has one follower that is commanded.
 */
export function* weightedReel(
  take: Take,
  plan: Plan,
  cast: Cast,
  by: 'leader' | 'commands',
  { fromUs, toUs }: Stretch,
  speed: number,
  factors: readonly number[],
): Generator<Row> {
  const made = { by: 'retime', parents: [], how: {} } as const;
  const row = makeRow(takeHeader({ name: take.header.rig, plan }, [], 0, false, made));
  row.event = EVENT_CODES.target;
  const ways = plan.followers.flatMap((_, f) => {
    const asked = askedOf(plan, cast, by);
    const way = oneWay(take, asked, f, { fromUs, toUs }, (factors[f] as number) / speed);
    return [{ f, way, next: way.next() }];
  });
  for (;;) {
    let first: (typeof ways)[number] | null = null;
    for (const one of ways)
      if (one.next.done !== true && (first === null || one.next.value.tUs < (first.next.value as Instant).tUs))
        first = one;
    if (first === null) return;
    const instant = first.next.value as Instant;
    const arm = row.followers[first.f] as RowFollower;
    for (const each of row.followers) each.commanded = 0;
    arm.commanded = 1;
    arm.angleRad.set(instant.angles);
    arm.speedRadS.set(instant.speeds);
    row.tUs = Math.round(instant.tUs);
    yield row;
    first.next = first.way.next();
  }
}

interface Instant {
  tUs: number;
  readonly angles: Float64Array;
  readonly speeds: Float64Array;
}

/** @param factor how much longer than the take it lasts */
function* oneWay(take: Take, asked: Asked, f: number, { fromUs, toUs }: Stretch, factor: number): Generator<Instant> {
  let last: Float64Array | null = null;
  let k = 0;
  const dt = factor / RATE_HZ;
  for (const row of resampled(take, RATE_HZ, fromUs, toUs)) {
    const angles = asked(row, f);
    if (angles === null) return;
    if (!angles.includes(Number.NaN)) {
      const before: Float64Array = last ?? angles.slice();
      const speeds = angles.map((angle, j) => (angle - (before[j] as number)) / dt);
      yield { tUs: (k * US_PER_S * factor) / RATE_HZ, angles, speeds };
      last = angles.slice();
    }
    k++;
  }
}
