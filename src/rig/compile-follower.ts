import type { ArmSpec } from '../arm/spec.ts';
import type { FollowerJointSpec, FollowerSpec, ServoSpec, WeightedSource } from '../follower/spec.ts';
import type { LeaderSpec } from '../leader/spec.ts';
import { compileMap } from '../map/compile.ts';
import type { OutputWiring, PowerWiring } from '../wire/types.ts';
import { compileWhole } from './compile-arm.ts';
import { rising } from './compile-leader.ts';
import { reachMm } from './reach.ts';
import type { FollowerJoint, FollowerProfile } from './schema/follower.ts';
import { periodUs, radians } from './units.ts';
import { servosOf } from './servo-list.ts';
import type { Loose } from './shape.ts';
import { commandsOf, wireName } from './wire-choice.ts';

/** An arm that reaches less than this is put into its rest pose without asking. */
const WAKE_REACH_MM = 300;

/**
 * A follower file without mistakes, in radians and microseconds, tied to its leader's joints by index.
 * @param leaderArm the leader's geometry; null where its file gives none
 */
export function compileFollower(profile: FollowerProfile, leader: LeaderSpec, leaderArm: ArmSpec | null): FollowerSpec {
  const { joints, join, poses } = profile;
  const specs = joints.map((joint) => compileJoint(joint, leader));
  const whole = compileWhole(profile, specs, leaderArm);
  return {
    name: profile.follower,
    periodUs: periodUs(profile.rate_hz),
    joints: specs,
    servos: compileServos(profile),
    joinShare: join.speed,
    joinMeet: join.meet,
    wake: wakeOf(profile),
    stopCategory: profile.stop_category,
    hasPower: powerWiring(profile) !== null,
    onLostPulse: profile.on_lost_pulse,
    poses: new Map(
      Object.entries(poses).map(([name, angles]) => [
        name,
        Float64Array.from(joints, (joint) => radians(angles[joint.name] ?? joint.rest_deg)),
      ]),
    ),
    ...(whole === null ? {} : { whole }),
  };
}

/** What a wire needs to know of a follower; null while a part of that is malformed. */
export function outputWiring(profile: Loose<FollowerProfile>): OutputWiring | null {
  const { follower, joints, servos, wire } = profile;
  const names = joints?.flatMap(({ name }) => name ?? []);
  if (follower === undefined || wireName(wire) === null || names === undefined || names.length !== joints?.length)
    return null;
  const wirings = servosOf(profile).flatMap(({ servo, turns }) => {
    const { channel, points } = servo;
    const joint = Object.keys(turns)[0];
    if (channel === undefined || points === undefined || joint === undefined) return [];
    const pulses = points.map(([, pulse]) => pulse);
    return [{ channel, minUs: Math.min(...pulses), maxUs: Math.max(...pulses), joint }];
  });
  if (servos === undefined || wirings.length !== servosOf(profile).length) return null;
  const commands = commandsOf(wire);
  return {
    follower,
    joints: names,
    servos: wirings,
    power: powerWiring(profile),
    ...(commands === null ? {} : { lines: commands }),
  };
}

/** Which pose the first pulse assumes, where the file leaves it open. */
export function wakeOf({ wake, arm }: FollowerProfile): FollowerSpec['wake'] {
  if (wake !== undefined) return wake;
  return arm !== undefined && reachMm(arm.links) < WAKE_REACH_MM ? 'rest' : 'ask';
}

/** On lines the board's own texts switch the power, so that no channel needs naming. */
function powerWiring({ power, wire }: Loose<FollowerProfile>): PowerWiring | null {
  if (power?.channel !== undefined && power.on !== undefined) return { channel: power.channel, on: power.on };
  const byText = commandsOf(wire)?.powerOn ?? null;
  return byText === null ? null : { channel: 0, on: 'high' };
}

function compileJoint(joint: FollowerJoint, leader: LeaderSpec): FollowerJointSpec {
  const { from } = joint;
  const weights = from === undefined ? {} : typeof from === 'string' ? { [from]: 1 } : from;
  const names = leader.joints.map(({ name }) => name);
  const sources = weighted(weights, names);
  const [minRad, maxRad] = joint.range_deg.map(radians) as [number, number];
  const sign = joint.direction === 'reversed' ? -1 : 1;
  const free = { gain: sign * joint.gain, offsetRad: radians(joint.offset_deg) };
  const tied = joint.stretch ? stretched(sources, minRad, maxRad, sign, leader) : free;
  return {
    name: joint.name,
    sources,
    ...tied,
    minRad,
    maxRad,
    deadbandRad: radians(joint.deadband_deg),
    speedRadS: radians(joint.speed_deg_s),
    accelRadS2: radians(joint.accel_deg_s2),
    restRad: radians(joint.rest_deg),
  };
}

/** The leader joint's travel laid over the range, lowest on lowest; reversed, lowest on highest. */
function stretched(
  sources: readonly WeightedSource[],
  minRad: number,
  maxRad: number,
  sign: number,
  leader: LeaderSpec,
): { readonly gain: number; readonly offsetRad: number } {
  const source = leader.joints[sources[0]?.joint ?? -1];
  if (source === undefined) throw new Error('stretch without a source passed the rules');
  const ends = [source.map.value(source.travelMin), source.map.value(source.travelMax)];
  const low = Math.min(...ends);
  const gain = (sign * (maxRad - minRad)) / (Math.max(...ends) - low);
  return { gain, offsetRad: (sign > 0 ? minRad : maxRad) - gain * low };
}

function compileServos(profile: FollowerProfile): readonly ServoSpec[] {
  const names = profile.joints.map(({ name }) => name);
  return servosOf(profile).map(({ servo: { channel, points, deadband_us }, turns }) => ({
    channel,
    turns: weighted(turns, names),
    map: compileMap(rising(points.map(([degrees, pulse]) => [radians(degrees), pulse])), 'straight', 'clamp'),
    deadbandUs: deadband_us,
  }));
}

function weighted(
  weights: Readonly<Record<string, number | undefined>>,
  names: readonly string[],
): readonly WeightedSource[] {
  return Object.entries(weights).map(([name, weight = 0]) => {
    const joint = names.indexOf(name);
    if (joint < 0) throw new Error(`joint ${name} passed the rules unknown`);
    return { joint, weight };
  });
}
