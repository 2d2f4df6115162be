import type { Edit, EditPath } from '../rig/edit.ts';
import type { PlainValue } from '../rig/flow-text.ts';
import type { ReadFile } from '../rig/file-reader.ts';
import { libraryOf } from '../rig/include.ts';
import type { LocatedNode, Path } from '../rig/located.ts';
import { nodeAt } from '../rig/located.ts';
import { mistakeList } from '../rig/mistake.ts';
import type { RigProfiles } from '../rig/compile.ts';
import { servosOf } from '../rig/servo-list.ts';
import { hundredth } from './points-report.ts';
import { type FitProblem, problem } from './problems.ts';
import type { FitReport, JointReport, MatchReport, PointsReport, ServoReport } from './report.ts';

/** What is to be put into one file. */
export interface FileEdits {
  readonly file: string;
  readonly edits: readonly Edit[];
}

export interface PlannedEdits {
  readonly files: readonly FileEdits[];
  /** Fitted values that have no place of their own. */
  readonly problems: readonly FitProblem[];
}

/** Gains are told to a part in ten thousand: less than any joint's play. */
const tenThousandth = (value: number): number => Math.round(value * 1e4) / 1e4;

/** Rounded down, a deadband would let some of the noise through. */
const upToHundredth = (value: number): number => Math.ceil(value * 100) / 100;

/** No board sends a pulse finer than half a microsecond. */
const tenth = (value: number): number => Math.round(value * 10) / 10;

/**
 * Where fitted values belong: in the file, and at the path, that the profile's own values come from.
 * @param smooth the suggested smoothing and deadbands are wanted too
 */
export function plannedEdits(
  rigFile: string,
  readFile: ReadFile,
  profiles: RigProfiles,
  report: FitReport,
  smooth: boolean,
): PlannedEdits {
  const nodes = memberNodes(rigFile, readFile);
  const files = new Map<string, Edit[]>();
  const problems: FitProblem[] = [];
  const put = (node: LocatedNode, value: Readonly<Record<string, PlainValue>>): void => {
    const { file, path } = node.place;
    const edits = files.get(file) ?? [];
    // Values one by one: a file keeps its order, and a key that is new goes to the end of its map.
    for (const [key, each] of Object.entries(value)) edits.push({ path: [...editPath(path), key], value: each });
    files.set(file, edits);
  };

  for (const joint of report.joints) {
    const index = profiles.leader.joints.findIndex(({ name }) => name === joint.joint);
    const node = nodes.leader === null ? null : nodeAt(nodes.leader, ['joints', index]);
    const cutoff = smooth ? (report.suggestions.find((each) => each.joint === joint.joint)?.cutoff_hz ?? null) : null;
    const values = {
      ...leaderValues(joint, profiles.leader.joints[index], report.date),
      ...(cutoff === null ? {} : { smooth: { cutoff_hz: hundredth(cutoff) } }),
    };
    if (node !== null && Object.keys(values).length > 0) put(node, values);
  }
  const putFollower = (arm: string, joint: string, path: Path, value: Readonly<Record<string, PlainValue>>): void => {
    const member = profiles.followers.findIndex(({ follower }) => follower === arm);
    const node = nodes.followers[member] === undefined ? null : nodeAt(nodes.followers[member], path);
    if (node === null) return;
    const shared = nodes.followers.some((other, i) => i !== member && isSame(nodeAt(other, path), node));
    if (shared)
      problems.push(problem('FIT_NOT_HERE', arm, joint, `its joints stand in ${node.place.file}, for others too`));
    else put(node, value);
  };
  for (const servo of report.servos) {
    const profile = profiles.followers.find(({ follower }) => follower === servo.follower);
    const listed = servosOf(profile ?? {}).find(({ servo: { channel } }) => channel === servo.channel);
    if (listed !== undefined) putFollower(servo.follower, servo.joint, listed.path, servoValues(servo, report.date));
  }
  for (const match of report.matches) {
    const profile = profiles.followers.find(({ follower }) => follower === match.follower);
    const index = profile?.joints.findIndex(({ name }) => name === match.joint) ?? -1;
    putFollower(match.follower, match.joint, ['joints', index], matchValues(match, report.date));
  }
  for (const { follower, joint, deadbandDeg } of smooth ? deadbandsOf(report) : []) {
    const profile = profiles.followers.find((each) => each.follower === follower);
    const index = profile?.joints.findIndex(({ name }) => name === joint) ?? -1;
    putFollower(follower, joint, ['joints', index], { deadband_deg: upToHundredth(deadbandDeg) });
  }
  return { files: [...files].map(([file, edits]) => ({ file, edits })), problems };
}

interface WantedDeadband {
  readonly follower: string;
  readonly joint: string;
  readonly deadbandDeg: number;
}

/** One a joint that needs one: where several joints of the leader feed it, their noises add as squares. */
function deadbandsOf({ suggestions }: FitReport): readonly WantedDeadband[] {
  const found = new Map<string, WantedDeadband>();
  for (const { follower, joint, deadband_deg } of suggestions.flatMap(({ feeds }) => feeds)) {
    const key = `${follower}\n${joint}`;
    const deadbandDeg = Math.hypot(found.get(key)?.deadbandDeg ?? 0, deadband_deg);
    if (deadbandDeg > 0) found.set(key, { follower, joint, deadbandDeg });
  }
  return [...found.values()];
}

function leaderValues(
  { channel, points, sweep, still }: JointReport,
  was: { readonly curve: string; readonly channel: number } | undefined,
  date: string,
): Record<string, PlainValue> {
  const noise = still?.noise_counts ?? sweep?.noise_counts;
  return {
    ...(channel === was?.channel ? {} : { channel }),
    ...(points === null ? {} : { points: points.map, ...(points.curve === was?.curve ? {} : { curve: points.curve }) }),
    ...(sweep === null || sweep.wraps ? {} : { travel_counts: sweep.span_counts.map(Math.round) }),
    ...(noise === undefined ? {} : { noise_counts: hundredth(noise) }),
    ...(points === null ? {} : { fitted: note(points, points.curve, date) }),
  };
}

function servoValues({ travel, deadband_us }: ServoReport, date: string): Record<string, PlainValue> {
  return {
    ...(travel === null ? {} : { points: travel.points.map.map(([us, deg]) => [deg, us]) }),
    ...(deadband_us === null ? {} : { deadband_us: tenth(deadband_us.is) }),
    ...(travel === null ? {} : { fitted: note(travel.points, travel.points.curve, date) }),
  };
}

function matchValues(
  { gain, direction, was, offset_deg, points }: MatchReport,
  date: string,
): Record<string, PlainValue> {
  return {
    gain: tenThousandth(gain.is),
    ...(direction === was ? {} : { direction }),
    offset_deg: hundredth(offset_deg.is),
    fitted: note(inFollowerDeg(points, gain.is), 'match', date),
  };
}

/** The hand errs in degrees of the leader; a follower's joint turns its gain of them. */
function inFollowerDeg({ rms_deg, error_95_deg, used }: Noted, gain: number): Noted {
  return { rms_deg: rms_deg * gain, error_95_deg: error_95_deg === null ? null : error_95_deg * gain, used };
}

type Noted = Pick<PointsReport, 'rms_deg' | 'error_95_deg' | 'used'>;

function note({ rms_deg, error_95_deg, used }: Noted, method: string, date: string): PlainValue {
  const error = error_95_deg === null ? {} : { error_deg: hundredth(error_95_deg) };
  return { date, method, residual_deg: hundredth(rms_deg), ...error, points: used };
}

interface MemberNodes {
  readonly leader: LocatedNode | null;
  readonly followers: readonly LocatedNode[];
}

/** The profiles of a rig that has loaded without mistakes, with the place of every value. */
function memberNodes(rigFile: string, readFile: ReadFile): MemberNodes {
  const mistakes = mistakeList();
  const library = libraryOf(readFile, mistakes);
  const rig = library.open(rigFile, { file: rigFile, line: 1, column: 1, path: '' });
  if (rig?.kind !== 'map') return { leader: null, followers: [] };
  const leader = rig.entries.get('leader')?.value;
  const followers = rig.entries.get('followers')?.value;
  return {
    leader: leader === undefined ? null : library.profile(leader, 'leader'),
    followers:
      followers?.kind === 'list' ? followers.items.flatMap((one) => library.profile(one, 'follower') ?? []) : [],
  };
}

function isSame(a: LocatedNode | null, b: LocatedNode): boolean {
  return a !== null && a.place.file === b.place.file && a.place.path === b.place.path;
}

/** `joints[1].servo` as the steps that lead there. */
function editPath(path: string): EditPath {
  return [...path.matchAll(/\[(\d+)\]|([\w-]+)/g)].map(([, index, key]) =>
    index === undefined ? (key ?? '') : Number(index),
  );
}
