import { describe, expect, it } from 'vitest';
import { LIMITS } from '../../src/follower/reasons.ts';
import { ARM_SIZES, armFigures, armReport } from '../../tools/bench/arm.ts';
import { hand, JOINTS, tipFollowers } from '../../tools/bench/arm-scene.ts';

const WHOLE_ARM = LIMITS.end_speed | LIMITS.keep_out | LIMITS.load;

describe('the bench of the arm kernels', () => {
  it('times every kernel and compares it with a forward pose', () => {
    const figures = armFigures(ARM_SIZES.tiny);
    expect(figures.map(({ name }) => name)).toEqual([
      'forward pose of six joints',
      'inverse, warm start',
      'load and dynamics',
      'certified step, far from its limits',
      'certified step, close to its limits',
      'command of a capped arm in tip mode',
    ]);
    expect(figures[0]?.ratio).toBe(1);
    for (const { medianUs, p99Us, ratio, bytes } of figures) {
      expect(medianUs).toBeGreaterThan(0);
      expect(p99Us).toBeGreaterThan(0);
      expect(ratio).toBeGreaterThan(0);
      expect(bytes).not.toBeNaN();
    }
    const lines = armReport(figures).split('\n');
    expect(lines).toHaveLength(7);
    expect(lines[2]).toMatch(/^inverse, warm start +\d+\.\d\d +of 25 +\d+\.\d +of 100 +\d+\.\d +-?\d+\.\d$/);
  });

  it('lets its arms move, and holds some of them back', () => {
    const arms = tipFollowers(2);
    const poses = hand();
    const pose = new Float64Array(JOINTS);
    const [first, second] = arms as unknown as readonly [(typeof arms)[number], (typeof arms)[number]];
    for (const one of arms) one.limitSpeed(Float64Array.of(1), false);
    const before = [...first.governor.x];
    let held = 0;
    for (let k = 0; k < 600; k++) {
      poses.at(k, false, pose);
      for (const one of arms) {
        one.want(pose, false);
        one.step(Float64Array.of(0.005));
      }
      if (first.limits.some((bits) => (bits & WHOLE_ARM) !== 0)) held++;
    }
    expect([...first.governor.x]).toEqual([...second.governor.x]);
    expect(Math.max(...before.map((x, j) => Math.abs(x - (first.governor.x[j] as number))))).toBeGreaterThan(0.1);
    expect(held).toBeGreaterThan(50);
  });
});
