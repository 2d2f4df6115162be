import { nearest } from '../port/nearest.ts';
import type { CompiledRig } from '../rig/compiled.ts';
import { radians } from '../rig/units.ts';

/** Where each follower of a trace starts, radians in joint order, null at rest; or what is wrong with the words. */
export type StartPoses = { readonly from: readonly (Float64Array | null)[] } | { readonly mistakes: readonly string[] };

/**
 * Reads `--from`: a pose that a profile names, in which the followers start that have it, the others at rest; or angles
 * such as `shoulder=40,stork.elbow=-10`, for every follower with that joint or for the one that is named.
 */
export function startPoses(rig: CompiledRig, text: string): StartPoses {
  return text.includes('=') ? fromAngles(rig, text) : fromName(rig, text.trim());
}

function fromName(rig: CompiledRig, name: string): StartPoses {
  const from = rig.plan.followers.map(({ poses }) => poses.get(name) ?? null);
  if (from.some((pose) => pose !== null)) return { from };
  const known = [...new Set(rig.plan.followers.flatMap(({ poses }) => [...poses.keys()]))];
  const near = nearest(name, known);
  const right =
    near !== null
      ? `did you mean ${near}?`
      : known.length === 0
        ? 'no profile of the rig names one; write angles, such as shoulder=40'
        : `the profiles name ${known.join(', ')}`;
  return { mistakes: [`--from: no follower has a pose ${name}; ${right}`] };
}

function fromAngles(rig: CompiledRig, text: string): StartPoses {
  const from = rig.plan.followers.map(({ joints }) => Float64Array.from(joints, ({ restRad }) => restRad));
  const mistakes = text.split(',').flatMap((each) => setAngle(rig, from, each.trim()));
  return mistakes.length === 0 ? { from } : { mistakes };
}

function setAngle(rig: CompiledRig, from: readonly Float64Array[], text: string): readonly string[] {
  const parts = /^(?:([\w-]+)\.)?([\w-]+)\s*=\s*([+-]?\d+(?:\.\d+)?)$/.exec(text);
  if (parts === null) return [`--from: "${text}" is no angle; write joint=degrees, such as shoulder=40`];
  const [, follower, name = '', degrees] = parts;
  const angleRad = radians(Number(degrees));
  const mistakes: string[] = [];
  let found = 0;
  rig.plan.followers.forEach((spec, f) => {
    if (follower !== undefined && follower !== spec.name) return;
    const j = spec.joints.findIndex((joint) => joint.name === name);
    const joint = spec.joints[j];
    if (joint === undefined) return;
    found++;
    (from[f] as Float64Array)[j] = angleRad;
    if (angleRad < joint.minRad || angleRad > joint.maxRad)
      mistakes.push(`--from: ${name} of ${spec.name} does not reach ${degrees} degrees; stay inside its range_deg`);
  });
  if (found > 0) return mistakes;
  const known = rig.plan.followers.flatMap((spec) => spec.joints.map((joint) => `${spec.name}.${joint.name}`));
  const asked = follower === undefined ? name : `${follower}.${name}`;
  const near = nearest(asked, follower === undefined ? known.map((each) => each.replace(/^.*\./, '')) : known);
  return [
    `--from: there is no joint ${asked}; ${near === null ? `there are ${known.join(', ')}` : `did you mean ${near}?`}`,
  ];
}
