import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { bar } from '../../../src/cli/view/bar.ts';
import { shapesFor } from '../../../src/cli/view/shapes.ts';
import { textOf } from './scenes.ts';

const shapes = shapesFor({ LANG: 'C.UTF-8' });
const drawn = (angle_deg: number, target_deg: number, range_deg: readonly [number, number], width = 13): string =>
  textOf(bar({ angle_deg, target_deg, range_deg }, width, shapes));

describe('The bar of a joint', () => {
  it('shows where the arm is told to be and where it is to go', () => {
    // Eleven places for -50 to 50: -50 is the first, 0 the sixth, 50 the last.
    expect(drawn(-50, 0, [-50, 50])).toBe('├●────◇─────┤');
    expect(drawn(50, 0, [-50, 50])).toBe('├─────◇────●┤');
  });

  it('shows both in one place as one sign', () => {
    expect(drawn(0, 0.4, [-50, 50])).toBe('├─────◆─────┤');
  });

  it('keeps its width and both marks, whatever is outside its range', () => {
    const deg = fc.double({ min: -1e6, max: 1e6, noNaN: true });
    fc.assert(
      fc.property(deg, deg, deg, deg, fc.integer({ min: 5, max: 60 }), (angle, target, a, b, width) => {
        const text = drawn(angle, target, [Math.min(a, b), Math.max(a, b)], width);
        expect(text).toHaveLength(width);
        expect(text).toMatch(/^├─*(◆|●─*◇|◇─*●)─*┤$/);
      }),
    );
  });
});
