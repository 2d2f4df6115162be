import type { Place } from './mistake.ts';

/** A parsed file in which every value knows where it stands, so that mistakes found later can be placed. */
export type LocatedNode = LocatedMap | LocatedList | LocatedScalar;

export interface LocatedMap {
  readonly kind: 'map';
  readonly place: Place;
  readonly entries: ReadonlyMap<string, LocatedEntry>;
}

export interface LocatedEntry {
  readonly keyPlace: Place;
  readonly value: LocatedNode;
}

export interface LocatedList {
  readonly kind: 'list';
  readonly place: Place;
  readonly items: readonly LocatedNode[];
}

export interface LocatedScalar {
  readonly kind: 'scalar';
  readonly place: Place;
  readonly value: string | number | boolean | null;
  /** The reader has refused what stands here, and has said so: no more needs to be said about it. */
  readonly refused?: true;
}

/** Keys and list indices from a node down to another. */
export type Path = readonly PropertyKey[];

/** The plain value, in objects without a prototype: no key of a file can reach one. */
export function plain(node: LocatedNode): unknown {
  if (node.kind === 'scalar') return node.value;
  if (node.kind === 'list') return node.items.map(plain);
  const object = emptyObject();
  for (const [key, entry] of node.entries) object[key] = plain(entry.value);
  return object;
}

export function emptyObject(): Record<string, unknown> {
  return Object.create(null) as Record<string, unknown>;
}

/** The node at a path, or null. */
export function nodeAt(node: LocatedNode, path: Path): LocatedNode | null {
  let at: LocatedNode | null = node;
  for (const step of path) at = at === null ? null : childOf(at, step);
  return at;
}

/** Where the value at a path stands; of a value that is not there, where the nearest one around it stands. */
export function placeAt(node: LocatedNode, path: Path): Place {
  let at = node;
  for (const step of path) {
    const child = childOf(at, step);
    if (child === null) break;
    at = child;
  }
  return at.place;
}

function childOf(node: LocatedNode, step: PropertyKey): LocatedNode | null {
  if (node.kind === 'map') return node.entries.get(String(step))?.value ?? null;
  if (node.kind === 'list' && typeof step === 'number') return node.items[step] ?? null;
  return null;
}

export function isRefused(node: LocatedNode | null): boolean {
  return node?.kind === 'scalar' && node.refused === true;
}

/** `joints` and `1` and `range_deg` as `joints[1].range_deg`. */
export function pathText(base: string, step: PropertyKey): string {
  if (typeof step === 'number') return `${base}[${step}]`;
  const key = String(step);
  if (!/^[\w-]+$/.test(key)) return `${base}[${JSON.stringify(key)}]`;
  return base === '' ? key : `${base}.${key}`;
}
