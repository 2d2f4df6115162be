import { US_PER_S } from '../clock/clock.ts';
import type { FollowerSpec } from '../follower/spec.ts';
import { takeHeader } from './header.ts';
import { type Motion, playing, samples } from './motion.ts';
import { EVENT_CODES, type Row, row as makeRow, type RowFollower } from './row.ts';
import { type Path, path } from './smooth-path.ts';

/** A follower on its way along the path of all those with the same time. */
interface Walk {
  readonly follower: number;
  readonly factor: number;
  readonly path: Path;
  /** Where in the path's samples its joints begin. */
  readonly from: number;
  /** Commands so far. */
  count: number;
}

/**
 * A motion as smooth commands for each follower on its own time: rows whose followers are the rig's, in order of time.
 * Each has one follower that is commanded, once a period of its own, so that it is never asked to guess. Whoever comes to
 * the end first stands there until all have.
 * @param factors by which each follower of the rig is slower than the take
 */
export function* pacedReel(motion: Motion, factors: readonly number[]): Generator<Row> {
  const { take, plan } = motion;
  const made = { by: 'retime', parents: [], how: {}, posed: true } as const;
  const row = makeRow(takeHeader({ name: take.header.rig, plan }, [], 0, false, made));
  row.event = EVENT_CODES.target;
  const walks = walksOf(motion, factors);
  for (const walk of walks) {
    walk.path.to(0);
    stand(row, walk);
  }
  const going = new Set(walks);
  while (going.size > 0) {
    const walk = walks.reduce((first, other) =>
      nextUs(plan.followers, other) < nextUs(plan.followers, first) ? other : first,
    );
    row.tUs = nextUs(plan.followers, walk);
    if (!walk.path.to(row.tUs / US_PER_S / walk.factor)) going.delete(walk);
    for (const arm of row.followers) arm.commanded = 0;
    stand(row, walk).commanded = 1;
    walk.count++;
    yield row;
  }
}

function nextUs(followers: readonly FollowerSpec[], { follower, count }: Walk): number {
  return count * (followers[follower] as FollowerSpec).periodUs;
}

/** Those who share their time share the reading of the take. */
function walksOf(motion: Motion, factors: readonly number[]): readonly Walk[] {
  const { plan } = motion;
  const groups = new Map<number, number[]>();
  for (const f of playing(motion)) groups.set(factors[f] as number, [...(groups.get(factors[f] as number) ?? []), f]);
  return Array.from(groups).flatMap(([factor, followers]) => {
    const widths = followers.map((f) => (plan.followers[f] as FollowerSpec).joints.length);
    const width = widths.reduce((sum, joints) => sum + joints, 0);
    const shared = path(samples(motion, followers), width);
    return followers.map((follower, i): Walk => {
      const from = widths.slice(0, i).reduce((sum, joints) => sum + joints, 0);
      return { follower, factor, path: shared, from, count: 0 };
    });
  });
}

function stand(row: Row, { follower, factor, path: { anglesRad, speedsRadS }, from }: Walk): RowFollower {
  const arm = row.followers[follower] as RowFollower;
  for (let j = 0; j < arm.angleRad.length; j++) {
    arm.angleRad[j] = anglesRad[from + j] as number;
    arm.speedRadS[j] = (speedsRadS[from + j] as number) / factor;
  }
  return arm;
}
