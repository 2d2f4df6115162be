import type { MistakeCode } from './mistake-codes.ts';

/** Where something stands. Lines and columns count from 1; `path` is the way of keys to it inside its file. */
export interface Place {
  readonly file: string;
  readonly line: number;
  readonly column: number;
  readonly path: string;
}

/** One thing wrong with a rig or profile file, where, and what would be right. */
export interface ProfileMistake extends Place {
  readonly code: MistakeCode;
  readonly wrong: string;
  readonly right: string;
}

/** Gathers mistakes, so that all of them are told at once. */
export interface MistakeList {
  add(code: MistakeCode, place: Place, wrong: string, right: string): void;
  /** By file and place, each once: a profile that is used twice is wrong once. */
  sorted(): readonly ProfileMistake[];
}

export function mistakeList(): MistakeList {
  const byLine = new Map<string, ProfileMistake>();
  return {
    add(code, place, wrong, right) {
      const { file, line, column, path } = place;
      const mistake = { code, file, line, column, path, wrong, right };
      byLine.set(mistakeLine(mistake), mistake);
    },
    sorted: () => [...byLine.values()].sort(byPlace),
  };
}

/** The mistake as the one line that people and editors read. */
export function mistakeLine(mistake: ProfileMistake): string {
  const { file, line, column, path, wrong, right } = mistake;
  return `${file}:${line}:${column}: ${path === '' ? '(file)' : path}: ${wrong}; ${right}`;
}

function byPlace(a: ProfileMistake, b: ProfileMistake): number {
  if (a.file !== b.file) return a.file < b.file ? -1 : 1;
  return a.line - b.line || a.column - b.column;
}
