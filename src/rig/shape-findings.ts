import type { z } from 'zod';
import { nearest } from '../port/nearest.ts';
import { nodeAt, pathText, placeAt } from './located.ts';
import type { LocatedNode, Path } from './located.ts';
import type { MistakeCode } from './mistake-codes.ts';
import type { Place } from './mistake.ts';
import { childSchema } from './schema/json-schema.ts';
import type { JsonSchema } from './schema/json-schema.ts';

type Issue = z.core.$ZodIssue;

export interface Finding {
  readonly code: MistakeCode;
  /** To the malformed value, or to where it is missing. */
  readonly path: Path;
  readonly place: Place;
  readonly wrong: string;
  readonly right: string;
}

type Words = Pick<Finding, 'code' | 'wrong' | 'right'>;

interface Located {
  readonly issue: Issue;
  readonly path: Path;
  /** The complaint is about the key at the path's end, not about its value. */
  readonly ofKey?: true;
}

/** The schema's complaints in words, with places; what is right is taken from the schema's descriptions. */
export function findingsOf(issues: readonly Issue[], root: LocatedNode, json: JsonSchema): readonly Finding[] {
  const flat = issues.flatMap((issue) => flatten(issue, [], root));
  const unknown = flat
    .filter(({ issue }) => issue.code === 'unrecognized_keys')
    .map(({ path }) => unknownKey(path, root, json));
  // A misspelt key is one mistake, not two: the key it was meant to be is not called missing as well.
  const meant = new Set(unknown.map(({ meantPath }) => meantPath));
  const others = flat
    .filter(({ issue, path }) => issue.code !== 'unrecognized_keys' && !meant.has(textOf(path)))
    .map((located) => finding(located, root, json));
  return [...unknown, ...others];
}

function flatten(issue: Issue, base: Path, root: LocatedNode): readonly Located[] {
  const path = [...base, ...issue.path];
  if (issue.code === 'unrecognized_keys') return issue.keys.map((key) => ({ issue, path: [...path, key] }));
  if (issue.code === 'invalid_key') return issue.issues.map((inner) => ({ issue: inner, path, ofKey: true }));
  if (issue.code !== 'invalid_union') return [{ issue, path }];
  const node = nodeAt(root, path);
  const branches = issue.errors.filter((branch) => !branch.some((inner) => isOtherType(inner, node)));
  const [closest] = branches.sort((a, b) => a.length - b.length);
  return closest === undefined ? [{ issue, path }] : closest.flatMap((inner) => flatten(inner, path, root));
}

/** Whether a branch of a union was not meant at all. */
function isOtherType(issue: Issue, node: LocatedNode | null): boolean {
  if (issue.path.length > 0) return false;
  const isText = node?.kind === 'scalar' && typeof node.value === 'string';
  return issue.code === 'invalid_type' || (issue.code === 'invalid_value' && !isText);
}

function unknownKey(path: Path, root: LocatedNode, json: JsonSchema): Finding & { readonly meantPath: string | null } {
  const key = String(path.at(-1));
  const around = path.slice(0, -1);
  const map = nodeAt(root, around);
  const known = Object.keys(schemaAt(json, root, around).properties ?? {});
  const absent = known.filter((name) => map?.kind !== 'map' || !map.entries.has(name));
  const near = nearest(key, absent) ?? nearest(key, known);
  const right = near === null ? `known keys are ${listed(known)}` : `did you mean ${near}?`;
  return {
    code: 'RIG_KEY_UNKNOWN',
    path,
    place: keyAt(root, path)?.place ?? placeAt(root, path),
    wrong: `${JSON.stringify(key)} is not a key here`,
    right,
    meantPath: near === null ? null : textOf([...around, near]),
  };
}

function finding({ issue, path, ofKey }: Located, root: LocatedNode, json: JsonSchema): Finding {
  const node = ofKey === true ? keyAt(root, path) : nodeAt(root, path);
  const what = descriptionAt(json, root, path);
  const name = subject(path);
  const words = node === null ? missing(name, what) : wordsOf(issue, name, node, what);
  return { ...words, path, place: node?.place ?? placeAt(root, path) };
}

/** A key as a value of its own. */
function keyAt(root: LocatedNode, path: Path): LocatedNode | null {
  const key = String(path.at(-1));
  const map = nodeAt(root, path.slice(0, -1));
  const entry = map?.kind === 'map' ? map.entries.get(key) : undefined;
  return entry === undefined ? null : { kind: 'scalar', place: entry.keyPlace, value: key };
}

function missing(name: string, what: string): Words {
  return { code: 'RIG_KEY_MISSING', wrong: `${name} is missing`, right: `give ${what}` };
}

function wordsOf(issue: Issue, name: string, node: LocatedNode, what: string): Words {
  const wrong = `${name} is ${valueText(node)}`;
  switch (issue.code) {
    case 'invalid_type':
      return { code: 'RIG_VALUE_TYPE', wrong, right: `give ${TYPE_WORDS[issue.expected] ?? issue.expected}: ${what}` };
    case 'invalid_value': {
      const choices = issue.values.map(String);
      const near = nearest(String(node.kind === 'scalar' ? node.value : ''), choices);
      const right =
        near === null ? `choose one of ${listed(choices)}` : `did you mean ${near}? One of ${listed(choices)}`;
      return { code: 'RIG_VALUE_CHOICE', wrong, right };
    }
    case 'too_small':
    case 'too_big': {
      const bound = boundText(issue);
      if (issue.origin === 'number' || issue.origin === 'int')
        return { code: 'RIG_VALUE_BOUNDS', wrong, right: `give ${bound}: ${what}` };
      return { code: 'RIG_LIST_LENGTH', wrong: `${name} has ${lengthText(node)}`, right: `give ${bound}: ${what}` };
    }
    case 'invalid_format': {
      const right = 'use a lower-case name of a-z, 0-9, _ and - that begins with a letter';
      return { code: 'RIG_NAME_SHAPE', wrong: `${quoted(node)} cannot be a name`, right };
    }
    default:
      return { code: 'RIG_VALUE_TYPE', wrong, right: `give ${what}` };
  }
}

const TYPE_WORDS: Readonly<Record<string, string>> = {
  number: 'a number',
  int: 'a whole number',
  string: 'a text',
  boolean: 'true or false',
  object: 'keys with values',
  record: 'keys with values',
  array: 'a list',
  tuple: 'a list',
};

function boundText(issue: z.core.$ZodIssueTooSmall | z.core.$ZodIssueTooBig): string {
  if (issue.code === 'too_big') return `${issue.inclusive === false ? 'less than' : 'at most'} ${issue.maximum}`;
  return `${issue.inclusive === false ? 'more than' : 'at least'} ${issue.minimum}`;
}

function lengthText(node: LocatedNode): string {
  if (node.kind === 'scalar') return `${String(node.value).length} letters`;
  const count = node.kind === 'list' ? node.items.length : node.entries.size;
  return count === 1 ? '1 entry' : `${count} entries`;
}

function quoted(node: LocatedNode): string {
  return JSON.stringify(node.kind === 'scalar' ? node.value : null);
}

/** A value as a person would say it. */
export function valueText(node: LocatedNode): string {
  if (node.kind === 'map') return 'a map of keys';
  if (node.kind === 'list') return 'a list';
  if (node.value === null) return 'empty';
  return typeof node.value === 'string' ? `the text ${JSON.stringify(node.value.slice(0, 60))}` : String(node.value);
}

function listed(words: readonly string[]): string {
  return words.join(', ');
}

/** The last key of a path with the indices after it: `points[1][0]`. */
function subject(path: Path): string {
  const last = path.findLastIndex((step) => typeof step !== 'number');
  if (last < 0) return path.length === 0 ? 'the file' : textOf(path);
  return textOf(path.slice(last));
}

function textOf(path: Path): string {
  return path.reduce<string>(pathText, '');
}

function schemaAt(json: JsonSchema, root: LocatedNode, path: Path): JsonSchema {
  return path.reduce<JsonSchema>(
    (schema, step, i) => childSchema(schema, nodeAt(root, path.slice(0, i + 1)), step),
    json,
  );
}

/** The description of the innermost thing around a path that has one. */
function descriptionAt(json: JsonSchema, root: LocatedNode, path: Path): string {
  for (let length = path.length; length > 0; length--) {
    const { description } = schemaAt(json, root, path.slice(0, length));
    if (description !== undefined) return description;
  }
  return json.description ?? 'what the schema says';
}
