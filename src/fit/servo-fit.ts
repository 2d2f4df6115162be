import { PROTRACTOR_DEG } from './map-error.ts';
import type { Estimate, MapFit, NoMap } from './map-fit.ts';
import { fitMap } from './map-fit.ts';
import { studentT } from './distributions.ts';

/** One measured angle of a servo's horn, in the order in which they were measured. */
export interface ServoPoint {
  readonly pulseUs: number;
  readonly angleDeg: number;
}

export interface ServoFit {
  /** Degrees over microseconds. */
  readonly map: MapFit;
  /** True travel between the outer pulses that were measured, degrees, and the pulses. */
  readonly travelDeg: number;
  readonly betweenUs: readonly [number, number];
  /** What the profile's former points say it would be. */
  readonly nominalDeg: number;
  /** Angle come to with pulses rising less that with pulses falling, at equal pulses: backlash and deadband together. */
  readonly lostMotionDeg: Estimate | null;
}

/** Pulses this near to each other are one place, microseconds: half the finest step of hobby servos. */
const SAME_US = 1;
const TAILS = 0.05;

/**
 * @param nominal degrees that the former points give a pulse
 * @param noise spread in degrees that each reading has anyhow
 */
export function fitServo(
  points: readonly ServoPoint[],
  nominal: (pulseUs: number) => number,
  noise: number,
): ServoFit | NoMap {
  const pulses = points.map(({ pulseUs }) => pulseUs);
  const map = fitMap(
    pulses,
    points.map(({ angleDeg }) => angleDeg),
    { noise, usualScatter: PROTRACTOR_DEG, curves: true },
  );
  if ('why' in map) return map;
  const betweenUs = [Math.min(...pulses), Math.max(...pulses)] as const;
  return {
    map,
    travelDeg: Math.abs(map.value(betweenUs[1]) - map.value(betweenUs[0])),
    betweenUs,
    nominalDeg: Math.abs(nominal(betweenUs[1]) - nominal(betweenUs[0])),
    lostMotionDeg: lostMotion(points, map),
  };
}

/** From pulses that were come to both ways; the mean of their differences. */
function lostMotion(points: readonly ServoPoint[], map: MapFit): Estimate | null {
  const sign = Math.sign(map.slope.is);
  const differences: number[] = [];
  const used = new Set<number>();
  points.forEach((up, i) => {
    if (way(points, i) !== 1 || i === map.wrong?.index) return;
    const j = points.findIndex(
      (down, k) =>
        !used.has(k) &&
        k !== map.wrong?.index &&
        way(points, k) === -1 &&
        Math.abs(down.pulseUs - up.pulseUs) <= SAME_US,
    );
    const down = points[j];
    if (down === undefined) return;
    used.add(j);
    // Play leaves a horn behind: come to with pulses rising it lags, which is a lower angle where angles rise with pulses.
    differences.push(sign * (down.angleDeg - up.angleDeg));
  });
  const n = differences.length;
  if (n === 0) return null;
  const mean = differences.reduce((sum, d) => sum + d, 0) / n;
  if (n === 1) return { is: mean, error95: null };
  const spread = Math.sqrt(differences.reduce((sum, d) => sum + (d - mean) ** 2, 0) / (n - 1));
  return { is: mean, error95: (studentT(TAILS, n - 1) * spread) / Math.sqrt(n) };
}

/** Which way a pulse was come to; 0 where nobody knows. */
function way(points: readonly ServoPoint[], i: number): number {
  const [before, now] = [points[i - 1], points[i]];
  return before === undefined || now === undefined ? 0 : Math.sign(now.pulseUs - before.pulseUs);
}
