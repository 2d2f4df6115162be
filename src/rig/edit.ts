import { isDeepStrictEqual } from 'node:util';
import { isMap, isNode, isPair, isScalar, isSeq, parseDocument } from 'yaml';
import type { Node, Pair, Scalar, YAMLMap, YAMLSeq } from 'yaml';
import { flowText, isList } from './flow-text.ts';
import type { PlainValue } from './flow-text.ts';
import { pathText } from './located.ts';

/**
 * Puts values into YAML text and leaves every other byte as it is: comments, order, spacing, quotes and line ends. The
 * yaml package's own writer re-aligns comments, so values are spliced in where its reader found the old ones.
 */

/** Keys and list indices from the top of the file to a value. */
export type EditPath = readonly (string | number)[];

export interface Edit {
  readonly path: EditPath;
  /** What is to stand there. A map keeps the keys that `value` does not name. */
  readonly value: PlainValue;
}

/** Why a text was left as it is. */
export interface EditFault {
  readonly fault: 'not yaml' | 'no such place' | 'not plain';
  /** Of the edit that could not be made, as mistakes write it; empty if the text could not be read at all. */
  readonly path: string;
}

/** One passage and what replaces it. */
interface Splice {
  readonly from: number;
  readonly to: number;
  readonly text: string;
}

/** A list that differs in length is written anew; so is anything that becomes another kind of value. */
export function editYaml(text: string, edits: readonly Edit[]): string | EditFault {
  let edited = text;
  for (const { path, value } of edits) {
    const next = editOnce(edited, path, value);
    if (typeof next !== 'string') return { fault: next.fault, path: path.reduce<string>(pathText, '') };
    edited = next;
  }
  return edited;
}

function editOnce(text: string, path: EditPath, value: PlainValue): string | Pick<EditFault, 'fault'> {
  const before = read(text);
  if (before === null) return { fault: 'not yaml' };
  const splices = splicesFor(before.contents, path, value, text);
  if (splices === null) return { fault: 'no such place' };
  const edited = splices
    .toSorted((a, b) => b.from - a.from)
    .reduce((so, splice) => so.slice(0, splice.from) + splice.text + so.slice(splice.to), text);
  // Tags, explicit keys and the like are rare enough here to be found out instead of foreseen.
  const after = read(edited);
  if (after === null || !isDeepStrictEqual(after.plain, withValue(before.plain, path, value)))
    return { fault: 'not plain' };
  return edited;
}

interface Parsed {
  readonly contents: Node | null;
  readonly plain: unknown;
}

function read(text: string): Parsed | null {
  const document = parseDocument(text, { schema: 'core', strict: true, prettyErrors: false });
  if (document.errors.length > 0) return null;
  try {
    return { contents: document.contents, plain: document.toJS({ maxAliasCount: 0 }) as unknown };
  } catch {
    // An alias: what it stands for is written elsewhere.
    return null;
  }
}

/** What replaces what, so that `value` stands at `path` below `node`; null where the path leads nowhere. */
function splicesFor(node: Node | null, path: EditPath, value: PlainValue, text: string): readonly Splice[] | null {
  const [step, ...rest] = path;
  if (step === undefined) return node === null ? null : splicesTo(node, value, text);
  if (isSeq(node)) {
    const item = typeof step === 'number' ? node.items[step] : undefined;
    return isNode(item) ? splicesFor(item, rest, value, text) : null;
  }
  if (!isMap(node) || typeof step !== 'string') return null;
  const pair = pairOf(node, step);
  const whole = nested(rest, value);
  if (pair === null) return whole === null ? null : [added(node, step, whole, text)];
  if (isEmpty(pair.value)) return whole === null ? null : [filled(pair, whole, text)];
  return splicesFor(pair.value, rest, value, text);
}

/** The least that turns a value that is there into another: what is the same already is not touched. */
function splicesTo(node: Node, value: PlainValue, text: string): readonly Splice[] {
  if (isList(value) && isSeq(node) && node.items.length === value.length && node.items.every(isNode)) {
    return node.items.flatMap((item, i) => splicesTo(item as Node, value[i] as PlainValue, text));
  }
  if (isPlainMap(value) && isMap(node)) {
    return Object.entries(value).flatMap(([key, inner]) => {
      const pair = pairOf(node, key);
      if (pair === null) return [added(node, key, inner, text)];
      return isEmpty(pair.value) ? [filled(pair, inner, text)] : splicesTo(pair.value, inner, text);
    });
  }
  if (isScalar(node) && node.value === value) return [];
  const [from] = rangeOf(node);
  // A literal block takes in the end of its last line.
  const to = from + text.slice(from, endOf(node)).trimEnd().length;
  return [{ from, to, text: flowText(value) }];
}

/** A key that is not there yet, in the manner of its map: on the same line, or on a line of its own. */
function added(map: YAMLMap, key: string, value: PlainValue, text: string): Splice {
  const entry = `${flowText(key)}: ${flowText(value)}`;
  const last = map.items.at(-1);
  const [from] = rangeOf(map);
  if (last === undefined) return { from: from + 1, to: from + 1, text: ` ${entry} ` };
  const end = endOfPair(last);
  if (map.flow === true) return { from: end, to: end, text: `, ${entry}` };
  const lineEnd = text.includes('\r\n') ? '\r\n' : '\n';
  const indent = ' '.repeat(from - (text.lastIndexOf('\n', from - 1) + 1));
  // A literal block ends with its line.
  const next = text[end - 1] === '\n' ? end : text.indexOf('\n', end) + 1;
  if (next === 0) return { from: text.length, to: text.length, text: `${lineEnd}${indent}${entry}` };
  return { from: next, to: next, text: `${indent}${entry}${lineEnd}` };
}

/** A value for a key that has none. */
function filled(pair: Pair<Node, Node | null>, value: PlainValue, text: string): Splice {
  const [, keyEnd] = rangeOf(pair.key);
  if (pair.value === null) return { from: keyEnd, to: keyEnd, text: `: ${flowText(value)}` };
  const [from, to] = rangeOf(pair.value);
  if (to > from) return { from, to, text: flowText(value) };
  const colon = text.indexOf(':', keyEnd) + 1;
  return { from: colon, to: colon, text: ` ${flowText(value)}` };
}

function isEmpty(value: Node | null): value is Scalar<null> | null {
  return value === null || (isScalar(value) && value.value === null);
}

function pairOf(map: YAMLMap, key: string): Pair<Node, Node | null> | null {
  const found = map.items.find((pair) => isScalar(pair.key) && String(pair.key.value) === key);
  return (found as Pair<Node, Node | null> | undefined) ?? null;
}

function rangeOf(node: Node): readonly [number, number] {
  if (node.range === undefined || node.range === null) throw new Error('a node that was read has a range');
  return [node.range[0], node.range[1]];
}

/** Where a value's own text ends: of a block, where its last entry does, because its range takes in a comment after it. */
function endOf(node: Node): number {
  const block = (isMap(node) || isSeq(node)) && node.flow !== true ? (node as YAMLMap | YAMLSeq) : null;
  const last = block?.items.at(-1);
  if (last === undefined) return rangeOf(node)[1];
  return isPair(last) ? endOfPair(last) : endOf(last as Node);
}

function endOfPair(pair: Pair): number {
  return endOf((pair.value ?? pair.key) as Node);
}

/** A value with the keys that lead to it; null where they would make a list. */
function nested(path: EditPath, value: PlainValue): PlainValue | null {
  if (path.some((step) => typeof step === 'number')) return null;
  return path.reduceRight<PlainValue>((inner, key) => ({ [String(key)]: inner }), value);
}

/** The plain value with another one at a path, as the edited text has to read. */
function withValue(plain: unknown, path: EditPath, value: PlainValue): unknown {
  const [step, ...rest] = path;
  if (step === undefined) return laidOver(plain, value);
  if (Array.isArray(plain)) return plain.map((item: unknown, i) => (i === step ? withValue(item, rest, value) : item));
  const map = isPlainMap(plain) ? plain : {};
  return { ...map, [step]: withValue(map[step], rest, value) };
}

function laidOver(plain: unknown, value: PlainValue): unknown {
  if (isList(value)) {
    const under: readonly unknown[] = Array.isArray(plain) && plain.length === value.length ? plain : [];
    return value.map((item, i) => laidOver(under[i], item));
  }
  // YAML's zero has no sign.
  if (!isPlainMap(value)) return value === 0 ? 0 : value;
  const under = isPlainMap(plain) ? plain : {};
  const inner = Object.entries(value).map(([key, one]) => [key, laidOver(under[key], one)]);
  return { ...under, ...Object.fromEntries(inner) };
}

function isPlainMap<T>(value: T): value is T & Readonly<Record<string, PlainValue>> {
  return typeof value === 'object' && value !== null && !Array.isArray(value);
}
