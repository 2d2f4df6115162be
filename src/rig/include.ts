import { dirname, isAbsolute, join, normalize } from 'node:path';
import type { FileText, ReadFile } from './file-reader.ts';
import { FILE_BYTES_MAX } from './file-reader.ts';
import { isRefused } from './located.ts';
import type { LocatedMap, LocatedNode } from './located.ts';
import { mergePatch } from './merge-patch.ts';
import type { MistakeList, Place } from './mistake.ts';
import type { FileKind } from './schema/json-schema.ts';
import { valueText } from './shape-findings.ts';
import { readYaml } from './yaml-source.ts';

/** A profile that builds on one that builds on one: past this, a directory is linked into itself. */
const INCLUDES_MAX = 16;

/** The files of one rig: each is read once, and what is wrong with it is told once. */
export interface Library {
  /** The file's tree; null, with mistakes added, if there is none. `asked` is where the file is named. */
  open(file: string, asked: Place): LocatedNode | null;
  /** Which kind of file a tree is, also by the profile that it is `like`; null if it says none. */
  kind(node: LocatedNode): FileKind | null;
  /** What stands for a profile (a path, a map, or a map with `like`), followed to a map of its own keys. */
  profile(node: LocatedNode, kind: 'leader' | 'follower'): LocatedNode | null;
}

/** By a tree's own keys. A rig has a `leader` too, so that is asked last. */
function kindOf(node: LocatedNode): FileKind | null {
  if (node.kind !== 'map') return null;
  if (node.entries.has('rig') || node.entries.has('followers')) return 'rig';
  if (node.entries.has('follower')) return 'follower';
  return node.entries.has('leader') ? 'leader' : null;
}

export function libraryOf(readFile: ReadFile, mistakes: MistakeList): Library {
  const read = new Map<string, LocatedNode | null>();

  const open = (file: string, asked: Place): LocatedNode | null => {
    const known = read.get(file);
    if (known !== undefined) return known;
    const text = bounded(readFile(file));
    const node = 'fault' in text ? null : readYaml(file, text.text, mistakes);
    if ('fault' in text) addFault(file, text.fault, text.detail, asked, mistakes);
    read.set(file, node);
    return node;
  };

  const fromFile = (node: LocatedNode, kind: FileKind, chain: readonly string[]): LocatedNode | null => {
    if (isRefused(node)) return null;
    if (node.kind !== 'scalar' || typeof node.value !== 'string' || node.value === '') {
      mistakes.add('RIG_VALUE_TYPE', node.place, `this is ${valueText(node)}`, `give the path of a ${kind} file`);
      return null;
    }
    const path = node.value;
    const file = fileOf(path, node.place);
    if (chain.includes(file) || chain.length >= INCLUDES_MAX) {
      const wrong = `${path} leads in a circle: ${[...chain.slice(-3), file].join(' -> ')}`;
      mistakes.add('RIG_INCLUDE_CYCLE', node.place, wrong, 'write the values into one file of the circle');
      return null;
    }
    const found = open(file, node.place);
    if (found === null) return null;
    const whole = follow(found, kind, [...chain, file]);
    const is = whole === null ? kind : kindOf(whole);
    if (is === kind) return whole;
    const wrong = `${path} is ${is === null ? 'no profile: it names neither leader nor follower' : `a ${is} file`}`;
    mistakes.add('RIG_KIND', node.place, wrong, `name a ${kind} file, one that begins with ${kind}:`);
    return null;
  };

  const follow = (node: LocatedNode, kind: FileKind, chain: readonly string[]): LocatedNode | null => {
    if (node.kind !== 'map') return node;
    const like = node.entries.get('like');
    if (like === undefined) return node;
    const base = fromFile(like.value, kind, chain);
    return base === null ? null : mergePatch(base, withoutLike(node));
  };

  const kind = (node: LocatedNode): FileKind | null => {
    let at: LocatedNode | null = node;
    for (let hops = 0; at?.kind === 'map' && hops < INCLUDES_MAX; hops++) {
      const own = kindOf(at);
      const like = at.entries.get('like')?.value;
      if (own !== null || like?.kind !== 'scalar') return own;
      at = open(fileOf(String(like.value), like.place), like.place);
    }
    return null;
  };

  return {
    open,
    kind,
    profile: (node, kind) => {
      const chain = [normalize(node.place.file)];
      return node.kind === 'map' ? follow(node, kind, chain) : fromFile(node, kind, chain);
    },
  };
}

function fileOf(path: string, named: Place): string {
  return normalize(isAbsolute(path) ? path : join(dirname(named.file), path));
}

function bounded(text: FileText): FileText {
  if ('fault' in text || text.text.length <= FILE_BYTES_MAX) return text;
  return { fault: 'too large', detail: `it has ${text.text.length} letters` };
}

function withoutLike(node: LocatedMap): LocatedMap {
  const entries = new Map(node.entries);
  entries.delete('like');
  return { ...node, entries };
}

function addFault(file: string, fault: string, detail: string, asked: Place, mistakes: MistakeList): void {
  if (fault === 'missing') {
    const right = asked.file === file ? 'mend the path' : `mend the path: it is relative to ${asked.file}`;
    mistakes.add('RIG_FILE_MISSING', asked, `there is no file ${file}`, right);
    return;
  }
  const right =
    fault === 'too large'
      ? `a rig or profile has at most ${FILE_BYTES_MAX} bytes`
      : 'name a text file that may be read';
  mistakes.add('RIG_FILE_UNREADABLE', asked, `${file} cannot be read: ${detail}`, right);
}
