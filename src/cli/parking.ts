import { type Clock, US_PER_S } from '../clock/clock.ts';
import type { Drive } from '../drive/drive.ts';

/** Whether arms that were asked to park have come to an end, one way or the other. */
export type ParkingOutcome =
  | 'under way'
  | 'parked'
  /** Names of those that are not, each with the state it is in. */
  | { readonly not: readonly string[] };

/** An arm on its way home whose port takes nothing gets nowhere: after this it is not waited for. */
const STALL_US = 5 * US_PER_S;

/** Follows arms home. Bounded: each look either sees an arm that has come nearer, or the time it has stood still grow. */
export function parking(drive: Drive, clock: Clock): () => ParkingOutcome {
  const seen = drive.followers.map(() => Number.NaN);
  let movedUs = clock.nowUs();
  return () => {
    const isUnderWay = drive.followers.some(({ is }) => is.state === 'parking' || (is.present && is.moving));
    drive.followers.forEach(({ is, arm }, f) => {
      const now = arm.governor.x.reduce((sum, angle) => sum + angle, 0);
      if (is.state === 'parking' && now !== seen[f]) movedUs = clock.nowUs();
      seen[f] = now;
    });
    if (isUnderWay && clock.nowUs() - movedUs < STALL_US) return 'under way';
    const not = drive.followers
      .filter((follower) => !isHome(follower))
      .map(({ spec, is }) => `${spec.name} (${is.state})`);
    return not.length === 0 ? 'parked' : { not };
  };
}

/** At rest with or without pulses; or it was shown to the operator, who never let it start. */
function isHome({ is, arm }: Drive['followers'][number]): boolean {
  switch (is.state) {
    case 'holding':
      return !is.moving && arm.atRest();
    case 'limp':
      return true;
    case 'waking':
      return !is.going;
    default:
      return false;
  }
}
