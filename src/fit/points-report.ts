import { leastDeviation } from './linearity.ts';
import type { Estimate, MapFit } from './map-fit.ts';
import type { Figure, PointsReport, WrongReport } from './report.ts';
import type { Suspect } from './wrong-point.ts';

/** What a file shows of a fitted value: a hundredth of a degree and of a count is below every pot. */
export const hundredth = (value: number): number => Math.round(value * 100) / 100 + 0;

export function figure({ is, error95 }: Estimate): Figure {
  return { is, error_95: error95 };
}

/**
 * @param x as measured, parallel to `knownDeg`
 * @param whole what independent linearity is a share of, in x; null: the points' own span
 */
export function pointsReport(
  fit: MapFit,
  x: readonly number[],
  knownDeg: readonly number[],
  whole: number | null,
): PointsReport {
  const used = x.map((_, i) => i).filter((i) => i !== fit.wrong?.index);
  const at = used.map((i) => x[i] as number);
  const deviation = leastDeviation(
    used.map((i) => knownDeg[i] as number),
    at,
  ).deviation;
  return {
    curve: fit.curve,
    degree: fit.degree,
    used: fit.n,
    measured: x.map((each, i) => ({
      x: each,
      known_deg: knownDeg[i] as number,
      residual_deg: fit.residuals[i] as number,
    })),
    wrong: suspectReport(fit.wrong, (index) => index),
    doubtful: suspectReport(fit.doubtful, (index) => used[index] as number),
    rms_deg: fit.rms,
    worst_deg: fit.worst,
    sigma_deg: fit.sigma,
    error_95_deg: fit.error95,
    slope_deg_per_unit: figure(fit.slope),
    offset_deg: figure(fit.offset),
    middle: { x: fit.middle.x, deg: figure(fit.middle) },
    linearity_percent: (100 * deviation) / (whole ?? Math.max(...at) - Math.min(...at)),
    map: fit.points.map(([a, b]) => [hundredth(a), hundredth(b)] as const),
  };
}

/** Exact data makes sigmas of any size; JSON knows no infinity. */
const SIGMAS_SHOWN_MAX = 1e6;

/** @param at index among all points */
function suspectReport(found: Suspect | null, at: (index: number) => number): WrongReport | null {
  if (found === null) return null;
  return { index: at(found.index), away_deg: found.away, sigmas: Math.min(found.sigmas, SIGMAS_SHOWN_MAX) };
}
