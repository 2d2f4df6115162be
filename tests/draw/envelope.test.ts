import { describe, expect, it } from 'vitest';
import { envelopes } from '../../src/draw/envelope.ts';
import type { Envelope } from '../../src/draw/envelope.ts';
import { arm, link, range, Y, Z } from './arms.ts';

/** Twice the reach of 0.5 m, in 260 cells. */
const CELL = 1 / 260;

const radii = (envelope: Envelope, zM: number): readonly number[] =>
  envelope.flatMap((ring) => ring.map(([u, v]) => Math.hypot(u, v - zM)));

describe('the envelope of an arm', () => {
  // Planar two-link arm: it reaches every radius from |l1 - l2| to l1 + l2 (J. J. Craig, Introduction to Robotics, ch. 4).
  const twoLinks = arm([link(0, Y, [0, 0, 0.3]), link(1, Y, [0, 0, 0.2])], { heightM: 0.5 });

  it('is the ring between the difference and the sum of two links that turn all round', () => {
    const { side } = envelopes(twoLinks, [range(-180, 180), range(-180, 180)]);
    expect(side).toHaveLength(2);
    for (const ring of side) {
      const found = radii([ring], 0.5);
      const wanted = Math.max(...found) > 0.3 ? 0.5 : 0.1;
      for (const radius of found) expect(Math.abs(radius - wanted)).toBeLessThan(2 * CELL);
    }
  });

  it('is a line from above where nothing turns about the vertical', () => {
    const { plan } = envelopes(twoLinks, [range(-180, 180), range(-180, 180)]);
    for (const [, v] of plan.flat()) expect(Math.abs(v)).toBeLessThan(2 * CELL);
    const us = plan.flat().map(([u]) => u);
    expect(Math.max(...us) - 0.5).toBeLessThan(2 * CELL);
    expect(0.5 - Math.max(...us)).toBeLessThan(CELL);
    expect(Math.min(...us) + 0.5).toBeLessThan(CELL);
  });

  it('is a sector where the base turns by 60 degrees', () => {
    const sector = arm([link(0, Z, [0, 0, 0.1]), link(1, Y, [0, 0, 0.4])]);
    const { plan } = envelopes(sector, [range(-30, 30), range(45, 90)]);
    const angles = plan.flat().map(([u, v]) => (Math.atan2(v, u) * 180) / Math.PI);
    expect(Math.max(...angles)).toBeGreaterThan(29);
    expect(Math.max(...angles)).toBeLessThan(33);
    // Leaning 45 to 90 degrees from upright, 0.4 m long: 0.283 to 0.4 m out.
    const found = radii(plan, 0);
    expect(Math.abs(Math.min(...found) - 0.283)).toBeLessThan(0.02);
    expect(Math.abs(Math.max(...found) - 0.4)).toBeLessThan(0.02);
  });

  it('is a spot of an arm that cannot move its tip', () => {
    const { side } = envelopes(arm([link(0, Z, [0, 0, 0.4])]), [range(-90, 90)]);
    const found = radii(side, 0.4);
    expect(found.length).toBeGreaterThan(3);
    for (const radius of found) expect(radius).toBeLessThan(0.02);
  });
});
