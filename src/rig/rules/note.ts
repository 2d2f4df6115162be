import { placeAt } from '../located.ts';
import type { LocatedNode, Path } from '../located.ts';
import type { MistakeCode } from '../mistake-codes.ts';
import type { MistakeList } from '../mistake.ts';

/** Says what is wrong at a path of one profile, and what would be right. */
export type Note = (code: MistakeCode, path: Path, wrong: string, right: string) => void;

export function noteIn(node: LocatedNode, mistakes: MistakeList): Note {
  return (code, path, wrong, right) => mistakes.add(code, placeAt(node, path), wrong, right);
}

/** Notes each value that stands a second time: `say` words it. */
export function noteRepeats<T>(
  entries: readonly { readonly value: T | undefined; readonly path: Path; readonly what: string }[],
  say: (value: T, path: Path, what: string, former: string) => void,
): void {
  const seen = new Map<T, string>();
  for (const { value, path, what } of entries) {
    if (value === undefined) continue;
    const former = seen.get(value);
    if (former === undefined) seen.set(value, what);
    else say(value, path, what, former);
  }
}
