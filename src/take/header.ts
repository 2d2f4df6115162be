import { z } from 'zod';
import type { ArmSpec } from '../arm/spec.ts';
import type { Plan } from '../drive/plan.ts';
import type { LoadedRig } from '../rig/load.ts';

/** What a take says of itself before its first row: whose joints its columns are, under which limits, and how it was made. */
export interface TakeHeader {
  readonly rig: string;
  /** Clock stamp of t_us = 0, integer microseconds. */
  readonly startUs: number;
  /** It begins with the drive itself, so that its events folded again give its commands. */
  readonly fromStart: boolean;
  readonly unison: boolean;
  readonly pace: number;
  readonly leader: TakeLeader;
  readonly followers: readonly TakeFollower[];
  readonly made: Made;
}

export interface TakeLeader {
  readonly name: string;
  readonly joints: readonly string[];
  /** What each input of its board is: joints in order, then buttons. */
  readonly inputs: readonly string[];
  readonly arm: ArmSpec | null;
}

export interface TakeFollower {
  readonly name: string;
  readonly periodUs: number;
  readonly arm: ArmSpec | null;
  readonly joints: readonly TakeJoint[];
}

export interface TakeJoint {
  readonly name: string;
  readonly minRad: number;
  readonly maxRad: number;
  readonly speedRadS: number;
  readonly accelRadS2: number;
}

/** How a take came about; parents are takes of the same folder as they were then. */
export interface Made {
  readonly by: 'record' | 'layer' | 'trim' | 'splice' | 'smooth' | 'retime';
  readonly parents: readonly { readonly take: string; readonly rows: number }[];
  /** What was asked for, in the units of its keys. */
  readonly how: Readonly<Record<string, string | number | boolean>>;
  /** Its poses were led by a take, or made up afterwards: counts tell only what the hand did meanwhile. */
  readonly posed: boolean;
}

/** What makes poses of its own, or takes them from another take. */
export const POSING: ReadonlySet<Made['by']> = new Set(['layer', 'splice', 'smooth']);

const TAKE_VERSION = 1;
const VERSION_KEY = 'eidograph.take_version';
const HEADER_KEY = 'eidograph.take';
/** The rig and its profiles as their files said them then. */
export const PROFILES_KEY = 'eidograph.profiles';

/** The arm's geometry is kept for those who read it again; its numbers are judged where it is used. */
const arm = z.custom<ArmSpec>((value) => typeof value === 'object' && value !== null && 'links' in value).nullable();
const finite = z.number();
const header = z.object({
  rig: z.string(),
  startUs: finite,
  fromStart: z.boolean(),
  unison: z.boolean(),
  pace: finite,
  leader: z.object({ name: z.string(), joints: z.array(z.string()), inputs: z.array(z.string()), arm }),
  followers: z
    .array(
      z.object({
        name: z.string(),
        periodUs: finite.positive(),
        arm,
        joints: z.array(
          z.object({ name: z.string(), minRad: finite, maxRad: finite, speedRadS: finite, accelRadS2: finite }),
        ),
      }),
    )
    .max(127),
  made: z
    .object({
      by: z.enum(['record', 'layer', 'trim', 'splice', 'smooth', 'retime']),
      parents: z.array(z.object({ take: z.string(), rows: finite })),
      how: z.record(z.string(), z.union([z.string(), finite, z.boolean()])),
      // Takes made before the key was do not have it, and are used for years.
      posed: z.boolean().optional(),
    })
    .transform(({ posed, ...made }) => ({ ...made, posed: posed ?? POSING.has(made.by) })),
});

/** @param inputs names of the leader board's inputs, in its own order */
export function takeHeader(
  rig: { readonly name: string; readonly plan: Plan },
  inputs: readonly string[],
  startUs: number,
  fromStart: boolean,
  made: Made,
): TakeHeader {
  const { leader, followers, unison, pace } = rig.plan;
  const leaderArm = followers.find((spec) => spec.whole?.tip)?.whole?.tip?.leader ?? null;
  return {
    rig: rig.name,
    startUs,
    fromStart,
    unison,
    pace,
    leader: { name: leader.name, joints: leader.joints.map((joint) => joint.name), inputs, arm: leaderArm },
    followers: followers.map((spec) => ({
      name: spec.name,
      periodUs: spec.periodUs,
      arm: spec.whole?.arm ?? null,
      joints: spec.joints.map(({ name, minRad, maxRad, speedRadS, accelRadS2 }) => ({
        name,
        minRad,
        maxRad,
        speedRadS,
        accelRadS2,
      })),
    })),
    made,
  };
}

/** @param profiles null: the take says nothing of its files */
export function headerMetadata(head: TakeHeader, profiles: LoadedRig['profiles'] | string | null): Map<string, string> {
  return new Map([
    [VERSION_KEY, `${TAKE_VERSION}`],
    [HEADER_KEY, JSON.stringify(head)],
    [PROFILES_KEY, typeof profiles === 'string' ? profiles : JSON.stringify(profiles)],
  ]);
}

/** The header out of a stream's metadata; `foreign`: it is no take, `newer`: of a version that is not known here. */
export function headerFrom(metadata: ReadonlyMap<string, string>): TakeHeader | 'foreign' | 'newer' {
  const version = Number(metadata.get(VERSION_KEY) ?? Number.NaN);
  if (version > TAKE_VERSION) return 'newer';
  if (version !== TAKE_VERSION) return 'foreign';
  try {
    const parsed = header.safeParse(JSON.parse(metadata.get(HEADER_KEY) ?? ''));
    return parsed.success ? parsed.data : 'foreign';
  } catch {
    return 'foreign';
  }
}
