import type { Figure, FitReport, JointReport, MatchReport, PointsReport, ServoReport } from './report.ts';
import { round } from './words.ts';

/** One line of a table: what, and how much. */
export type FigureLine = readonly [what: string, value: string];

/** Figures of a report in the order in which an operator asks for them; the terminal and the paper show the same. */

export function leaderFigures({ still, sweep, points }: JointReport): readonly FigureLine[] {
  const lines: FigureLine[] = [];
  if (points !== null) lines.push(...pointsFigures(points, 'counts', 'deg/count'));
  if (still !== null)
    lines.push(['noise at rest', `${round(still.noise_counts, 2)} counts rms, ${round(still.noise_deg, 3)} deg`]);
  if (sweep !== null) {
    const [low, high] = sweep.span_counts;
    const [a, b] = sweep.span_deg;
    lines.push(
      ['travel', `${round(low, 0)} to ${round(high, 0)} counts, ${round(a, 1)} to ${round(b, 1)} deg`],
      ['noise in the sweep’s dwells', `${round(sweep.noise_counts, 2)} counts rms, ${round(sweep.noise_deg, 3)} deg`],
      ['effective bits over the travel', round(sweep.effective_bits, 1)],
      ['travel visited', `${round(sweep.visited_percent, 0)} %`],
      ['dead spots', stretches(sweep.dead_spots_counts)],
      ['gaps', stretches(sweep.gaps_counts)],
      ['single spikes', String(sweep.spikes)],
      ['hysteresis', hysteresis(sweep)],
    );
  }
  return lines;
}

export function servoFigures(servo: ServoReport): readonly FigureLine[] {
  const { travel, deadband_us, backlash_deg } = servo;
  const lines: FigureLine[] = [];
  if (travel !== null) {
    const { travel_deg, nominal_deg, between_us, lost_motion_deg, points } = travel;
    lines.push(
      [
        'true travel',
        `${round(travel_deg, 1)} deg between ${round(between_us[0], 0)} and ${round(between_us[1], 0)} us ` +
          `(the profile said ${round(nominal_deg, 1)})`,
      ],
      ...pointsFigures(points, 'us', 'deg/us'),
      [
        'lost as it turns back',
        lost_motion_deg === null ? 'not measured both ways' : `${withError(lost_motion_deg, 2)} deg`,
      ],
    );
  }
  const slope = travel === null ? Number.NaN : Math.abs(travel.points.slope_deg_per_unit.is);
  lines.push([
    'deadband',
    deadband_us === null
      ? 'not measured in fine steps'
      : `${withError(deadband_us, 1)} us${Number.isNaN(slope) ? '' : `, ${round(deadband_us.is * slope, 2)} deg`}`,
  ]);
  if (backlash_deg !== null) lines.push(['backlash', `${withError(backlash_deg, 2)} deg`]);
  return lines;
}

export function matchFigures({ from, gain, direction, offset_deg, points }: MatchReport): readonly FigureLine[] {
  return [
    ['copies', from],
    ['gain', withError(gain, 4)],
    ['direction', direction],
    ['offset', `${withError(offset_deg, 2)} deg`],
    ['poses', String(points.used)],
    ['residual', `${round(points.rms_deg, 2)} deg of the leader rms, worst ${round(points.worst_deg, 2)}`],
  ];
}

function pointsFigures(points: PointsReport, unit: string, slopeUnit: string): readonly FigureLine[] {
  const { curve, used, measured, rms_deg, worst_deg, error_95_deg, slope_deg_per_unit, offset_deg, middle } = points;
  const shape = curve === 'straight' ? 'straight' : `monotone curve through ${points.map.length} knots`;
  return [
    ['map', `${shape}, from ${used} of ${measured.length} points`],
    ['error of the map, 95 %', error_95_deg === null ? 'unknown: too few points' : `${round(error_95_deg, 2)} deg`],
    ['residual', `${round(rms_deg, 2)} deg rms, worst ${round(worst_deg, 2)}`],
    ['slope of the straight line', `${withError(slope_deg_per_unit, 5)} ${slopeUnit}`],
    ['its offset', `${withError(offset_deg, 2)} deg at 0 ${unit}`],
    ['its middle', `${withError(middle.deg, 2)} deg at ${round(middle.x, 1)} ${unit}`],
    ['independent linearity', `${round(points.linearity_percent, 2)} %, reading errors included`],
  ];
}

/** There is something to write. */
export function wantsSmoothing({ suggestions }: FitReport): boolean {
  return suggestions.some(
    ({ cutoff_hz, feeds }) => cutoff_hz !== null || feeds.some(({ deadband_deg }) => deadband_deg > 0),
  );
}

export function suggestionLines({ suggestions }: FitReport): readonly FigureLine[] {
  return suggestions.map(({ joint, cutoff_hz, lag_ms, feeds }) => {
    const smoothing =
      cutoff_hz === null
        ? 'needs no smoothing'
        : `smooth: { cutoff_hz: ${round(cutoff_hz, 2)} }, ${round(lag_ms, 0)} ms of lag`;
    const tips = feeds.map(
      (feed) =>
        `${feed.follower} ${feed.joint}: tip ${round(feed.tip_mm, 2)} mm rms` +
        (feed.deadband_deg > 0 ? `, deadband_deg: ${round(feed.deadband_deg, 2)}` : ''),
    );
    return [joint, [smoothing, ...tips].join('; ')];
  });
}

function withError({ is, error_95 }: Figure, digits: number): string {
  return error_95 === null
    ? `${round(is, digits)} (error unknown)`
    : `${round(is, digits)} ± ${round(error_95, digits)}`;
}

function stretches(all: readonly (readonly [number, number])[]): string {
  return all.length === 0 ? 'none' : all.map(([from, to]) => `${round(from, 0)} to ${round(to, 0)} counts`).join(', ');
}

function hysteresis(sweep: NonNullable<JointReport['sweep']>): string {
  const { hysteresis_counts, hysteresis_deg, hand_wobble_counts, hysteresis_seen } = sweep;
  if (hysteresis_counts === null || hysteresis_deg === null || hand_wobble_counts === null)
    return 'not measured: no place was stood at both ways';
  const size = `${round(Math.abs(hysteresis_counts), 1)} counts, ${round(Math.abs(hysteresis_deg), 2)} deg`;
  const wobble = `${round(hand_wobble_counts, 1)} counts`;
  return hysteresis_seen ? `${size} (the hand wobbles by ${wobble})` : `none beyond the hand’s own wobble of ${wobble}`;
}
