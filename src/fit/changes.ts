import { editYaml } from '../rig/edit.ts';
import type { ReadFile } from '../rig/file-reader.ts';
import { loadRig } from '../rig/load.ts';
import type { ProfileMistake } from '../rig/mistake.ts';
import type { FileEdits } from './edits.ts';

/** One file as it is and as it is to be. */
export interface Change {
  readonly file: string;
  readonly was: string;
  readonly text: string;
}

export type Changes =
  | { readonly changes: readonly Change[] }
  /** The rig would have these mistakes: nothing of it may be written. */
  | { readonly mistakes: readonly ProfileMistake[] }
  /** A file whose text cannot be edited. */
  | { readonly uneditable: string; readonly path: string };

/** Edits applied to the texts of their files, and the rig read again from what would then be there. */
export function changesOf(rigFile: string, readFile: ReadFile, files: readonly FileEdits[]): Changes {
  const changes: Change[] = [];
  for (const { file, edits } of files) {
    const now = readFile(file);
    if ('fault' in now) return { uneditable: file, path: '' };
    const text = editYaml(now.text, edits);
    if (typeof text !== 'string') return { uneditable: file, path: text.path };
    if (text !== now.text) changes.push({ file, was: now.text, text });
  }
  const then: ReadFile = (file) => {
    const changed = changes.find((change) => change.file === file);
    return changed === undefined ? readFile(file) : { text: changed.text };
  };
  const loaded = loadRig(rigFile, then);
  return 'mistakes' in loaded ? { mistakes: loaded.mistakes } : { changes };
}

/** A line that goes, comes or stays. */
export interface DiffLine {
  readonly mark: '-' | '+' | ' ';
  readonly text: string;
}

/** Lines around a change that are shown with it. */
const CONTEXT = 1;

/** What changes between two texts, line by line (longest common subsequence), with a line of context. */
export function lineDiff(was: string, now: string): readonly DiffLine[] {
  const [a, b] = [was.split('\n'), now.split('\n')];
  const common = Array.from({ length: a.length + 1 }, () => new Uint32Array(b.length + 1));
  for (let i = a.length - 1; i >= 0; i--) {
    for (let j = b.length - 1; j >= 0; j--) {
      const [here, below] = [common[i] as Uint32Array, common[i + 1] as Uint32Array];
      here[j] = a[i] === b[j] ? (below[j + 1] as number) + 1 : Math.max(below[j] as number, here[j + 1] as number);
    }
  }
  const lines: DiffLine[] = [];
  let [i, j] = [0, 0];
  while (i < a.length || j < b.length) {
    if (i < a.length && j < b.length && a[i] === b[j]) {
      lines.push({ mark: ' ', text: a[i] as string });
      i++;
      j++;
    } else if (i < a.length && (j === b.length || (common[i + 1]?.[j] ?? 0) >= (common[i]?.[j + 1] ?? 0))) {
      lines.push({ mark: '-', text: a[i++] as string });
    } else {
      lines.push({ mark: '+', text: b[j++] as string });
    }
  }
  const changed = (at: number): boolean => (lines[at]?.mark ?? ' ') !== ' ';
  return lines.filter((_, at) =>
    Array.from({ length: 2 * CONTEXT + 1 }, (__, k) => changed(at + k - CONTEXT)).some(Boolean),
  );
}
