import { describe, expect, it } from 'vitest';
import { servos } from '../../src/follower/servos.ts';
import type { ServoSpec } from '../../src/follower/spec.ts';
import { compileMap } from '../../src/map/compile.ts';
import { DEG, followerJoint, servoOf } from '../plans.ts';

const mirrored = compileMap(
  [
    [-90 * DEG, 2440],
    [90 * DEG, 560],
  ],
  'straight',
  'clamp',
);

function pulses(specs: readonly ServoSpec[], anglesDeg: readonly number[]): number[] {
  const angles = Float64Array.from(anglesDeg, (deg) => deg * DEG);
  const joints = anglesDeg.map((_, j) => followerJoint(j));
  const { turn, pulsesUs } = servos([{ joints, servos: specs }], angles);
  turn({ from: 0, to: specs.length });
  return [...pulsesUs];
}

describe('the pulses of servos', () => {
  it('are straight between the points', () => {
    // By hand: 180 degrees are 1880 us, so 45 degrees are 470 from the middle at 1500.
    expect(pulses([servoOf(0), servoOf(1)], [45, -45])).toEqual([expect.closeTo(1970, 9), expect.closeTo(1030, 9)]);
  });

  it('never go beyond the outer points', () => {
    expect(pulses([servoOf(0), servoOf(1)], [500, -91])).toEqual([2440, 560]);
  });

  it('mirror where two servos share a joint', () => {
    const pair = [servoOf(0), servoOf(0, { map: mirrored })];
    expect(pulses(pair, [30])).toEqual([expect.closeTo(1500 + 940 / 3, 9), expect.closeTo(1500 - 940 / 3, 9)]);
  });

  it('turn by the sum where a linkage couples joints', () => {
    // A parallelogram elbow turns with the shoulder. By hand: 20 + 25 = 45 degrees; 20 - 0.5 * 40 = 0.
    const coupled = servoOf(1, {
      turns: [
        { joint: 0, weight: 1 },
        { joint: 1, weight: 1 },
      ],
    });
    const weighted = servoOf(1, {
      turns: [
        { joint: 0, weight: 1 },
        { joint: 1, weight: -0.5 },
      ],
    });
    expect(pulses([coupled], [20, 25])).toEqual([expect.closeTo(1970, 9)]);
    expect(pulses([weighted], [20, 40])).toEqual([expect.closeTo(1500, 9)]);
  });

  it("are each arm's own where several are made together", () => {
    const arms = [
      { joints: [followerJoint(0), followerJoint(1)], servos: [servoOf(1)] },
      { joints: [followerJoint(0)], servos: [servoOf(0), servoOf(0, { map: mirrored })] },
    ];
    const { turn, pulsesUs } = servos(arms, Float64Array.of(0, 45 * DEG, -90 * DEG));
    turn({ from: 1, to: 3 });
    expect([...pulsesUs]).toEqual([0, 560, 2440]);
    turn({ from: 0, to: 1 });
    expect([...pulsesUs]).toEqual([expect.closeTo(1970, 9), 560, 2440]);
  });
});
