import { reachM } from '../arm/extent.ts';
import { degreesOf, millimetresOf } from '../rig/units.ts';
import { addressOf, baudOf, BITS_PER_BYTE } from '../rig/boards.ts';
import { wireChoice, wireName } from '../rig/wire-choice.ts';
import { radPerCount } from './resolution.ts';
import type { LeaderSubject } from './subject.ts';

/** What a leader is, in the units of files. */
export interface CheckedLeader {
  readonly leader: string;
  readonly port: string;
  readonly wire: string | null;
  readonly reach_mm: number | null;
  /** Most readings a second that its port carries, if its lines are bare columns; null where that cannot be told. */
  readonly readings_hz_max: number | null;
  /** The baud rate that a thousand readings a second would take; null as above. */
  readonly baud_for_1000_hz: number | null;
  readonly joints: readonly CheckedLeaderJoint[];
  readonly buttons: readonly { readonly button: string; readonly channel: number; readonly does: string }[];
}

interface CheckedLeaderJoint {
  readonly joint: string;
  readonly channel: number;
  /** One step of the converter, at the steepest place of the map. */
  readonly count_deg: number;
  /** Angles of the travel's ends. */
  readonly travel_deg: readonly [number, number];
}

export function checkedLeader(subject: LeaderSubject): CheckedLeader {
  const { profile, spec, arm } = subject;
  const bytes = lineBytes(subject);
  const address = addressOf(profile.port);
  const baud = address === null ? null : baudOf(address, wireChoice(profile.wire).name);
  return {
    leader: profile.leader,
    port: profile.port,
    wire: wireName(profile.wire),
    reach_mm: arm === null ? null : millimetresOf(reachM(arm)),
    readings_hz_max: bytes === null || baud === null ? null : baud / (bytes * BITS_PER_BYTE),
    baud_for_1000_hz: bytes === null || baud === null ? null : 1000 * bytes * BITS_PER_BYTE,
    joints: spec.joints.map((joint, j) => {
      const ends = [joint.travelMin, joint.travelMax].map((counts) => degreesOf(joint.map.value(counts)));
      return {
        joint: joint.name,
        channel: profile.joints[j]?.channel ?? 0,
        count_deg: degreesOf(radPerCount(joint)),
        travel_deg: [Math.min(...ends), Math.max(...ends)],
      };
    }),
    buttons: profile.buttons.map(({ name, channel, does }) => ({ button: name, channel, does })),
  };
}

/** A line of columns up to the last channel in use, each as wide as the largest count, with separators and a line end. */
function lineBytes({ profile, spec }: LeaderSubject): number | null {
  if (wireName(profile.wire) !== 'lines') return null;
  const columns = 1 + Math.max(...[...profile.joints, ...profile.buttons].map(({ channel }) => channel));
  const digits = Math.max(...[spec.countsMin, spec.countsMax].map((counts) => String(Math.trunc(counts)).length));
  const checksum = wireChoice(profile.wire);
  const extra = checksum.name === 'lines' && checksum.lines.checksum !== null ? 3 : 0;
  // A digit too many is sent by nobody, a carriage return by every println.
  return columns * (digits + 1) - 1 + extra + 2;
}
