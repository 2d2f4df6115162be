import { isAlias, isMap, isScalar, isSeq, LineCounter, parseAllDocuments } from 'yaml';
import type { Document, Node, Pair, YAMLError } from 'yaml';
import { pathText } from './located.ts';
import type { LocatedEntry, LocatedNode } from './located.ts';
import type { MistakeList, Place } from './mistake.ts';

/** Deeper than any rig goes; keeps a file of brackets from exhausting the stack. */
const DEPTH_MAX = 24;

/** One bad quote can make the reader stumble over each line after it. */
const SYNTAX_MISTAKES_MAX = 20;

/**
 * Reads one YAML 1.2 document into a tree whose values know their places. What cannot be read is added to `mistakes`;
 * null if nothing is left to look at.
 */
export function readYaml(file: string, text: string, mistakes: MistakeList): LocatedNode | null {
  const lines = new LineCounter();
  // The core schema is forced, or a %YAML 1.1 line would turn the key `on` into true.
  const parsed = parseAllDocuments(text, { lineCounter: lines, prettyErrors: false, schema: 'core', strict: true });
  const documents: Document.Parsed[] = Array.isArray(parsed) ? parsed : [];
  const placeOf = (offset: number, path: string): Place => {
    const { line, col } = lines.linePos(offset);
    return { file, line: Math.max(line, 1), column: Math.max(col, 1), path };
  };

  const [first, second] = documents;
  if (first === undefined) return { kind: 'scalar', place: placeOf(0, ''), value: null };
  const faults = documents.flatMap((document) => [...document.errors, ...document.warnings]);
  for (const fault of faults.slice(0, SYNTAX_MISTAKES_MAX)) addSyntax(fault, placeOf(fault.pos[0], ''), mistakes);
  if (faults.some((fault) => fault.code !== 'DUPLICATE_KEY')) return null;
  if (second !== undefined) {
    const place = placeOf(second.contents?.range[0] ?? text.length, '');
    mistakes.add('RIG_YAML_DOCUMENTS', place, 'a second document begins here', 'keep one rig or profile in a file');
  }
  return located(first.contents, '', 0, placeOf, mistakes);
}

function addSyntax(fault: YAMLError, place: Place, mistakes: MistakeList): void {
  if (fault.code === 'DUPLICATE_KEY') {
    mistakes.add('RIG_YAML_KEY_TWICE', place, 'this key stands twice in one map', 'keep one of the two');
    return;
  }
  const said = fault.message.replace(/\s+/g, ' ').trim();
  mistakes.add('RIG_YAML_SYNTAX', place, `this is not YAML: ${said}`, 'mend the text here or just before');
}

type PlaceOf = (offset: number, path: string) => Place;

function located(node: Node | null, path: string, depth: number, placeOf: PlaceOf, mistakes: MistakeList): LocatedNode {
  const place = placeOf(node?.range?.[0] ?? 0, path);
  if (depth > DEPTH_MAX) {
    mistakes.add('RIG_YAML_SYNTAX', place, `it is nested more than ${DEPTH_MAX} deep`, 'no rig needs that; flatten it');
    return refusedAt(place);
  }
  if (isAlias(node)) {
    // Aliases multiply: a few lines of them can stand for gigabytes.
    const right = 'write the value out, or build on another profile with like:';
    mistakes.add('RIG_YAML_ALIAS', place, `*${node.source} is an alias`, right);
    return refusedAt(place);
  }
  if (isSeq(node)) {
    const items = node.items.map((item, i) => located(item as Node, pathText(path, i), depth + 1, placeOf, mistakes));
    return { kind: 'list', place, items };
  }
  if (isMap(node)) {
    const entries = new Map<string, LocatedEntry>();
    for (const pair of node.items) addEntry(pair as Pair<Node | null, Node | null>, entries);
    return { kind: 'map', place, entries };
  }
  const value: unknown = isScalar(node) ? node.value : null;
  // The core schema knows no other scalars; an absent one is empty.
  return { kind: 'scalar', place, value: isPlainScalar(value) ? value : null };

  function addEntry(pair: Pair<Node | null, Node | null>, entries: Map<string, LocatedEntry>): void {
    const offset = pair.key?.range?.[0] ?? 0;
    if (!isScalar(pair.key)) {
      mistakes.add('RIG_YAML_SYNTAX', placeOf(offset, path), 'this key is not a plain word', 'write key: value');
      return;
    }
    const key = String(pair.key.value);
    const keyPlace = placeOf(offset, pathText(path, key));
    if (key === '<<') {
      const right = 'write the values out, or build on another profile with like:';
      mistakes.add('RIG_YAML_ALIAS', keyPlace, '<< merges by alias', right);
      return;
    }
    const value =
      pair.value === null ? emptyAt(keyPlace) : located(pair.value, keyPlace.path, depth + 1, placeOf, mistakes);
    entries.set(key, { keyPlace, value });
  }
}

function refusedAt(place: Place): LocatedNode {
  return { kind: 'scalar', place, value: null, refused: true };
}

function emptyAt(place: Place): LocatedNode {
  return { kind: 'scalar', place, value: null };
}

function isPlainScalar(value: unknown): value is string | number | boolean | null {
  return value === null || ['string', 'number', 'boolean'].includes(typeof value);
}
