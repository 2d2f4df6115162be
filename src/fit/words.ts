import type { Hold } from './stillness.ts';
import type { MatchReport, PointsReport, ServoReport, SweepReport } from './report.ts';

/** Sentences of a fit: what was found, and after a semicolon what to do about it. */

export function pointsWords(points: PointsReport, unit: string, enough: number): readonly string[] {
  const { curve, used, wrong, doubtful, measured, sigma_deg, error_95_deg, linearity_percent } = points;
  const out: string[] = [];
  if (wrong !== null) {
    const { x, known_deg } = measured[wrong.index] as (typeof measured)[number];
    out.push(
      `the point at ${round(x, 1)} ${unit} (${known_deg} deg) is ${signed(wrong.away_deg)} deg off, ` +
        `${round(wrong.sigmas, 1)} times what the others scatter; it was left out: measure it again`,
    );
  }
  if (doubtful !== null) {
    const { x, known_deg } = measured[doubtful.index] as (typeof measured)[number];
    out.push(
      `the point at ${round(x, 1)} ${unit} (${known_deg} deg) agrees least, ${signed(doubtful.away_deg)} deg off, ` +
        `${round(doubtful.sigmas, 1)} times what the others scatter; it was kept: look at it again`,
    );
  }
  if (curve === 'monotone') {
    out.push(`a straight line would be off by a bend of its own (${round(linearity_percent, 1)} %), so it has a curve`);
  }
  if (sigma_deg === null) out.push(`${used} points fit any line exactly and tell no error; measure ${enough} or more`);
  else if (used < enough)
    out.push(
      `${used} points scatter by ${round(sigma_deg, 2)} deg; too few to name a wrong one: measure ${enough} or more`,
    );
  if (error_95_deg !== null && error_95_deg > MUCH_DEG) {
    out.push(`the map may be off by ${round(error_95_deg, 1)} deg; more points, or read more finely, make that less`);
  }
  return out;
}

/** An error that an operator sees from the stalls (common practice, no source). */
const MUCH_DEG = 3;

export function sweepWords(sweep: SweepReport): readonly string[] {
  const out: string[] = [];
  for (const [from, to] of sweep.dead_spots_counts)
    out.push(
      `dead spot at ${round(from, 0)} to ${round(to, 0)} counts; clean or change the pot, or keep away from there`,
    );
  for (const [from, to] of sweep.gaps_counts)
    out.push(
      `no reading between ${round(from, 0)} and ${round(to, 0)} counts; sweep more slowly, or the track is broken there`,
    );
  if (sweep.wraps) out.push('the pot runs over the end of its track inside the travel; turn it in its mount');
  if (!sweep.ends_confirmed) out.push('the ends were not stood at twice; rest a second at each stop, both times');
  if (sweep.spikes > 0) out.push(`${sweep.spikes} single readings off the path; despike: 3 takes them out`);
  if (sweep.hysteresis_seen && sweep.hysteresis_deg !== null && sweep.hand_wobble_counts !== null)
    out.push(
      `hysteresis of ${round(Math.abs(sweep.hysteresis_deg), 2)} deg between sweep up and sweep down, ` +
        'more than the hand wobbles; look for play between joint and pot',
    );
  return out;
}

/** Travel that falls short by more than this share is worth a word. */
const SHORT_SHARE = 0.03;

/** @param steps fine steps that were tried for the deadband */
export function servoWords(
  { travel, deadband_us, backlash_deg }: Omit<ServoReport, 'notes'>,
  enough: number,
  steps: number,
): readonly string[] {
  const out: string[] = [];
  if (travel !== null) {
    const { points, travel_deg, nominal_deg, between_us } = travel;
    out.push(...pointsWords(points, 'us', enough));
    if (travel_deg < (1 - SHORT_SHARE) * nominal_deg)
      out.push(
        `it turns ${round(travel_deg, 1)} deg between ${round(between_us[0], 0)} and ${round(between_us[1], 0)} us, ` +
          `${round(nominal_deg - travel_deg, 1)} deg less than the profile said`,
      );
  }
  const lost = travel?.lost_motion_deg ?? null;
  if (steps > 0 && deadband_us === null)
    out.push('its deadband is not known yet; take fine steps until it has moved twice the same way');
  else if (lost !== null && backlash_deg === null)
    out.push(
      `${round(lost.is, 2)} deg are lost as it turns back, backlash and deadband together; ` +
        'measure its deadband in fine steps to tell them apart',
    );
  else if (lost === null && deadband_us !== null)
    out.push('its backlash is not known; measure its travel both ways to have it');
  return out;
}

export function matchWords({
  direction,
  was,
  follower,
  joint,
  from,
  gain,
}: Omit<MatchReport, 'notes'>): readonly string[] {
  const out: string[] = [];
  if (direction !== was) {
    const turns = direction === 'reversed' ? 'the other way round' : 'the same way';
    out.push(
      `${joint} of ${follower} turns ${turns} than the profile says: as ${from} rises, it ` +
        `${direction === 'reversed' ? 'falls' : 'rises'} (direction: ${direction}, not ${was})`,
    );
  }
  if (gain.error_95 !== null && gain.error_95 > gain.is) {
    out.push('the gain is less certain than it is large; park the follower further apart and set the leader again');
  }
  return out;
}

export function holdWords(hold: Exclude<Hold, { still: true }>): string {
  switch (hold.why) {
    case 'few':
      return `only ${hold.n} readings came; hold it longer, or look to the port`;
    case 'moving':
      return 'it was still moving; rest it against something and hold again';
    case 'noisy':
      return 'it was not still enough; support the joint, or look to its wiring, and hold again';
    case 'rail':
      return 'it reads at the end of the converter’s range; the pot has lost its track there, or is turned too far';
  }
}

export function round(value: number, digits: number): string {
  return (Math.round(value * 10 ** digits) / 10 ** digits + 0).toFixed(digits);
}

function signed(value: number): string {
  return `${value < 0 ? '-' : '+'}${round(Math.abs(value), 1)}`;
}
