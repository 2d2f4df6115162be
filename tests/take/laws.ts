import { expect } from 'vitest';
import type { CompiledRig } from '../../src/rig/compiled.ts';
import { motionFaults } from '../motion-laws.ts';

interface Move {
  readonly tUs: number;
  readonly follower: number;
  readonly x: Float64Array;
}

/** Every follower's commands keep its range, speed and acceleration. */
export function expectLawful(rig: CompiledRig, moves: readonly Move[]): void {
  rig.plan.followers.forEach(({ joints }, f) => {
    const own = moves.filter(({ follower }) => follower === f).map(({ tUs, x }) => ({ tUs, anglesRad: x }));
    expect(own.length).toBeGreaterThan(3);
    expect(motionFaults(own, joints).slice(0, 5)).toEqual([]);
  });
}
