import type { LeaderJointSpec, LeaderSpec } from '../leader/spec.ts';
import { compileMap } from '../map/compile.ts';
import type { InputWiring } from '../wire/types.ts';
import type { LeaderJoint, LeaderProfile } from './schema/leader.ts';
import { microsecondsOf, radians } from './units.ts';
import { wireChoice } from './wire-choice.ts';

/** A leader file without mistakes, in radians and microseconds. Inputs are the joints in order, then the buttons. */
export function compileLeader(profile: LeaderProfile): LeaderSpec {
  const { joints, buttons } = profile;
  const wire = wireChoice(profile.wire);
  // A board that speaks only on change is silent while the hand is still: that is no lost contact.
  const onChange = wire.name === 'lines' && wire.lines.sends === 'on_change';
  return {
    name: profile.leader,
    joints: joints.map(compileJoint),
    buttons: buttons.map(({ name, pressed, counts, does }, i) => ({
      name,
      input: joints.length + i,
      pressed,
      counts,
      does,
    })),
    timeoutUs: onChange ? Number.POSITIVE_INFINITY : microsecondsOf(profile.timeout_ms),
    countsMin: profile.counts[0],
    countsMax: profile.counts[1],
  };
}

export function inputWiring({ joints, buttons, sampling_ms }: LeaderProfile): InputWiring {
  const inputs = [...joints, ...buttons];
  return {
    channels: inputs.map(({ channel }) => channel),
    names: inputs.map(({ name }) => name),
    samplingMs: sampling_ms,
  };
}

function compileJoint(joint: LeaderJoint, index: number): LeaderJointSpec {
  const points = joint.points.map(([counts, degrees]) => [counts, radians(degrees)] as const);
  // A leader joint may be turned beyond its measured points; the arm's own range is what limits it.
  const map = compileMap(rising(points), joint.curve, 'extend');
  const [travelMin, travelMax] = joint.travel_counts ?? [map.xMin, map.xMax];
  const { smooth } = joint;
  return {
    name: joint.name,
    input: index,
    map,
    travelMin,
    travelMax,
    despike: joint.despike,
    smooth:
      smooth === undefined
        ? null
        : {
            cutoffHz: smooth.cutoff_hz,
            betaHzPerRadS: smooth.beta_hz_per_deg_s / radians(1),
            slopeCutoffHz: smooth.slope_cutoff_hz,
          },
  };
}

/** Files may list points from either end. */
export function rising(points: readonly (readonly [number, number])[]): readonly (readonly [number, number])[] {
  const [first, second] = points;
  return first !== undefined && second !== undefined && first[0] > second[0] ? points.toReversed() : points;
}
