import type { z } from 'zod';
import { emptyObject, isRefused, nodeAt, plain } from './located.ts';
import type { LocatedMap, LocatedNode } from './located.ts';
import type { MistakeList } from './mistake.ts';
import type { JsonSchema } from './schema/json-schema.ts';
import { childSchema, schemaOf } from './schema/json-schema.ts';
import { findingsOf } from './shape-findings.ts';

/** A value of which any part may be missing, because it was wrong; pairs and other fixed lists are whole or missing. */
export type Loose<T> = T extends readonly (infer E)[]
  ? number extends T['length']
    ? readonly Loose<E>[]
    : T
  : T extends object
    ? { readonly [K in keyof T]?: Loose<T[K]> | undefined }
    : T;

/** What a file says: as a whole if it is well formed, and in any case with the malformed parts left out. */
export interface Shaped<T> {
  readonly whole: T | null;
  readonly loose: Loose<T>;
  readonly node: LocatedNode;
}

export type Shape<T> = (node: LocatedNode, mistakes: MistakeList) => Shaped<T>;

/** Reads nodes by a schema. What is malformed is added to the mistakes; what is left can still be checked further. */
export function shapeOf<T>(schema: z.ZodType<T>): Shape<T> {
  const json = schemaOf(schema);
  return (node, mistakes) => {
    const result = schema.safeParse(plain(node));
    if (result.success) return { whole: result.data, loose: result.data as Loose<T>, node };
    const bad = new Set<LocatedNode>();
    for (const { code, place, path, wrong, right } of findingsOf(result.error.issues, node, json)) {
      const at = nodeAt(node, path);
      if (!isRefused(at)) mistakes.add(code, place, wrong, right);
      if (at !== null) bad.add(at);
    }
    const loose = bad.has(node) || node.kind !== 'map' ? emptyObject() : wellFormedMap(node, json, bad);
    return { whole: null, loose: loose as Loose<T>, node };
  };
}

/** The well-formed part of a map, with defaults only for keys that are absent: a bad value is not a default one. */
function wellFormedMap(node: LocatedMap, json: JsonSchema, bad: ReadonlySet<LocatedNode>): Record<string, unknown> {
  const object = emptyObject();
  for (const [key, { value }] of node.entries) object[key] = wellFormed(value, childSchema(json, value, key), bad);
  for (const [key, child] of Object.entries(json.properties ?? {})) {
    if (!node.entries.has(key) && child.default !== undefined) object[key] = defaultOf(child);
  }
  return object;
}

function wellFormed(node: LocatedNode, json: JsonSchema, bad: ReadonlySet<LocatedNode>): unknown {
  if (bad.has(node)) return undefined;
  if (node.kind === 'scalar') return node.value;
  if (node.kind === 'map') return wellFormedMap(node, json, bad);
  const items = node.items.map((item, i) => wellFormed(item, childSchema(json, item, i), bad));
  return items.includes(undefined) ? undefined : items;
}

function defaultOf(json: JsonSchema): unknown {
  if (json.properties === undefined) return json.default;
  const entries = Object.entries(json.properties).filter(([, child]) => child.default !== undefined);
  return Object.fromEntries(entries.map(([key, child]) => [key, defaultOf(child)]));
}
