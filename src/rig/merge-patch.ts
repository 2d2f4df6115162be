import type { LocatedEntry, LocatedNode } from './located.ts';

/**
 * What `like:` does with the keys beside it: a JSON merge patch (RFC 7396). Maps are merged key by key, an empty value
 * (null) takes the key away, anything else, lists included, replaces what was there. Every value keeps its own place.
 */
export function mergePatch(target: LocatedNode | null, patch: LocatedNode): LocatedNode {
  if (patch.kind !== 'map') return patch;
  const entries = new Map<string, LocatedEntry>(target?.kind === 'map' ? target.entries : []);
  for (const [key, { keyPlace, value }] of patch.entries) {
    if (value.kind === 'scalar' && value.value === null) entries.delete(key);
    else entries.set(key, { keyPlace, value: mergePatch(entries.get(key)?.value ?? null, value) });
  }
  return { kind: 'map', place: patch.place, entries };
}
