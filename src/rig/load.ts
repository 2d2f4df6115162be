import { groupByPort } from './boards.ts';
import { compileRig } from './compile.ts';
import type { RigProfiles } from './compile.ts';
import type { CompiledRig } from './compiled.ts';
import { readFromDisk } from './file-reader.ts';
import type { ReadFile } from './file-reader.ts';
import { libraryOf } from './include.ts';
import type { Library } from './include.ts';
import { judgeFollower, judgeLeader } from './judge.ts';
import type { Judged } from './judge.ts';
import type { LocatedNode } from './located.ts';
import { mistakeList } from './mistake.ts';
import type { MistakeList, Place, ProfileMistake } from './mistake.ts';
import { betweenRules } from './rules/between.ts';
import { noteIn } from './rules/note.ts';
import { sharedRateRule } from './rules/rates.ts';
import type { FollowerProfile } from './schema/follower.ts';
import type { LeaderProfile } from './schema/leader.ts';
import { rigFrame } from './schema/rig.ts';
import { shapeOf } from './shape.ts';

/** All that is wrong with a file and those it names, sorted by file and place. */
export interface Refused {
  readonly mistakes: readonly ProfileMistake[];
}

export interface LoadedRig {
  readonly kind: 'rig';
  readonly rig: CompiledRig;
  /** What the files say, in their units. */
  readonly profiles: RigProfiles;
}

/** One profile alone: what only shows beside its rig (leader joints, shared ports) has not been looked at. */
export type LoadedProfile =
  | { readonly kind: 'leader'; readonly leader: LeaderProfile }
  | { readonly kind: 'follower'; readonly follower: FollowerProfile };

type Loaded = LoadedRig | LoadedProfile;

const frameShape = shapeOf(rigFrame);

/** Reads a rig and the profiles it names, and compiles it; or tells every mistake in them. */
export function loadRig(file: string, readFile: ReadFile = readFromDisk): LoadedRig | Refused {
  const loaded = load(file, readFile, true);
  if ('mistakes' in loaded || loaded.kind === 'rig') return loaded;
  throw new Error(`${file} was asked for as a rig and came as a ${loaded.kind}`);
}

/** Reads a rig, leader or follower file, whichever it is. */
export function loadProfile(file: string, readFile: ReadFile = readFromDisk): Loaded | Refused {
  return load(file, readFile, false);
}

function load(file: string, readFile: ReadFile, rigOnly: boolean): Loaded | Refused {
  const mistakes = mistakeList();
  const library = libraryOf(readFile, mistakes);
  const loaded = loadInto(file, library, mistakes, rigOnly);
  const found = mistakes.sorted();
  if (found.length > 0) return { mistakes: found };
  if (loaded === null) throw new Error(`${file} failed to load without a mistake`);
  return loaded();
}

type Finish = () => Loaded;

function loadInto(file: string, library: Library, mistakes: MistakeList, rigOnly: boolean): Finish | null {
  const start: Place = { file, line: 1, column: 1, path: '' };
  const node = library.open(file, start);
  if (node === null) return null;
  const kind = library.kind(node);
  if (kind === null || (rigOnly && kind !== 'rig')) {
    const wrong = kind === null ? 'this is neither a rig nor a profile' : `this is a ${kind} file`;
    const right = rigOnly
      ? 'name a rig file, one that begins with rig:'
      : 'begin it with rig:, leader: or follower: and a name';
    mistakes.add('RIG_KIND', node.place, wrong, right);
    return null;
  }
  if (kind === 'rig') return loadFrame(node, library, mistakes);
  const whole = library.profile(node, kind);
  if (whole === null) return null;
  if (kind === 'leader') {
    const leader = judgeLeader(whole, node, mistakes).whole;
    return leader === null ? null : () => ({ kind, leader });
  }
  const follower = judgeFollower(whole, node, mistakes).whole;
  return follower === null ? null : () => ({ kind, follower });
}

function loadFrame(node: LocatedNode, library: Library, mistakes: MistakeList): Finish | null {
  const frame = frameShape(node, mistakes).whole;
  if (node.kind !== 'map') return null;
  const leaderEntry = node.entries.get('leader')?.value;
  const followersEntry = node.entries.get('followers')?.value;
  const leader = leaderEntry === undefined ? null : member(leaderEntry, 'leader', judgeLeader, library, mistakes);
  const entries = followersEntry?.kind === 'list' ? followersEntry.items : [];
  const followers = entries.flatMap((entry) => member(entry, 'follower', judgeFollower, library, mistakes) ?? []);
  betweenRules(leader, followers, mistakes);
  sharedRateRules(followers, mistakes);
  const whole = followers.flatMap((follower) => follower.whole ?? []);
  const lead = leader?.whole ?? null;
  if (frame === null || lead === null || whole.length < followers.length) return null;
  const profiles = { leader: lead, followers: whole };
  return () => ({ kind: 'rig', rig: compileRig(frame, profiles), profiles });
}

function member<T>(
  entry: LocatedNode,
  kind: 'leader' | 'follower',
  judge: (node: LocatedNode, entry: LocatedNode, mistakes: MistakeList) => Judged<T>,
  library: Library,
  mistakes: MistakeList,
): Judged<T> | null {
  const node = library.profile(entry, kind);
  return node === null ? null : judge(node, entry, mistakes);
}

function sharedRateRules(followers: readonly Judged<FollowerProfile>[], mistakes: MistakeList): void {
  for (const group of groupByPort(followers.map(({ loose }) => loose.port))) {
    const sharing = group.flatMap((i) => followers[i] ?? []);
    const last = sharing.at(-1);
    if (last === undefined || sharing.length < 2) continue;
    sharedRateRule(
      sharing.map(({ loose }) => loose),
      noteIn(last.entry, mistakes),
    );
  }
}
