import fc from 'fast-check';
import { TheilSenRegression } from 'ml-regression-theil-sen';
import { linearRegression, linearRegressionLine } from 'simple-statistics';
import { describe, expect, it } from 'vitest';
import { type Polynomial, polynomials } from '../../src/fit/least-squares.ts';
import { theilSen } from '../../src/fit/theil-sen.ts';

/** General-purpose regression packages on the same points: simple-statistics, and ml-regression-theil-sen. */
const measured = fc
  .array(fc.tuple(fc.integer({ min: 0, max: 4095 }), fc.double({ min: -180, max: 180, noNaN: true })), {
    minLength: 3,
    maxLength: 40,
  })
  .filter((pairs) => new Set(pairs.map(([x]) => x)).size > 2);

/** How many pairs of points have a slope. */
function slopesOf(points: readonly (readonly [number, number])[]): number {
  return points.reduce((count, [x], i) => count + points.slice(i + 1).filter(([other]) => other !== x).length, 0);
}

describe('A second opinion', () => {
  it('on the least-squares line is the same', () => {
    fc.assert(
      fc.property(measured, (pairs) => {
        const fit = polynomials(
          pairs.map(([x]) => x),
          pairs.map(([, y]) => y),
          1,
        )[1] as Polynomial;
        const theirs = linearRegressionLine(linearRegression(pairs.map(([x, y]) => [x, y])));
        for (const at of [0, 1000, 4095])
          expect(Math.abs(fit.value(at) - theirs(at))).toBeLessThan(1e-6 * (1 + Math.abs(theirs(at))));
      }),
    );
  });

  it('on the robust line is the same', () => {
    // Of an even list the package's median may be one of the middle two rather than their mean, so both medians, that of
    // the slopes and that of the offsets, are taken over odd lists.
    const odd = measured.filter((pairs) => pairs.length % 2 === 1 && slopesOf(pairs) % 2 === 1);
    fc.assert(
      fc.property(odd, (pairs) => {
        const x = pairs.map(([each]) => each);
        const y = pairs.map(([, each]) => each);
        const theirs = new TheilSenRegression(x, y);
        const { slope, offset } = theilSen(x, y);
        expect(slope).toBeCloseTo(theirs.slope, 9);
        expect(offset).toBeCloseTo(theirs.intercept, 6);
      }),
    );
  });
});
