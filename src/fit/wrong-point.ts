import { studentTails } from './distributions.ts';
import type { Polynomial } from './least-squares.ts';

/** The point that agrees least with the others. */
export interface Suspect {
  readonly index: number;
  /** How far it is from what the others say, in y; positive: above. */
  readonly away: number;
  /** The same in standard errors of that distance, the others alone giving the spread. */
  readonly sigmas: number;
  /** How likely scatter alone makes any of so many points stand out so far (Bonferroni). */
  readonly chance: number;
}

/** A single point is called wrong from here on: what the others scatter by cannot explain it. */
const STANDS_OUT_SIGMAS = 5;
/** With fewer points, the others say too little of their own spread. */
const POINTS_MIN = 6;
/** Degrees of freedom that the others must keep among themselves. */
const DOF_MIN = 3;
/** A point whose leverage leaves less than this decides its own place: nothing can be said of it. */
const SAY_MIN = 1e-6;

/**
 * The point with the largest externally studentised residual: its distance from the fit through all others, over the
 * standard error of that distance (R. D. Cook and S. Weisberg, Residuals and Influence in Regression, 1982, section 2.2).
 * @param noise a spread in y that every point has anyhow (resolution, noise while held): exact data would otherwise turn
 *   rounding into wonders
 */
export function suspect(fit: Polynomial, x: ArrayLike<number>, noise: number): Suspect | null {
  let found: Suspect | null = null;
  const dof = fit.dof - 1;
  if (dof < 1) return null;
  for (let index = 0; index < fit.n; index++) {
    const say = 1 - fit.leverage(x[index] as number);
    if (say < SAY_MIN) continue;
    const residual = fit.residuals[index] as number;
    const away = residual / say;
    const others = Math.max(fit.squares - residual * away, 0) / dof;
    const sigmas = Math.abs(residual) / (Math.max(Math.sqrt(others), noise) * Math.sqrt(say));
    if (Number.isFinite(sigmas) && (found === null || sigmas > found.sigmas))
      found = { index, away, sigmas, chance: Math.min(1, fit.n * studentTails(sigmas, dof)) };
  }
  return found;
}

/** A suspect that stands out so far, among enough others, that it is called wrong and left out. */
export function wrongPoint(fit: Polynomial, x: ArrayLike<number>, noise: number): Suspect | null {
  if (fit.n < POINTS_MIN || fit.dof - 1 < DOF_MIN) return null;
  const found = suspect(fit, x, noise);
  return found !== null && found.sigmas >= STANDS_OUT_SIGMAS ? found : null;
}
