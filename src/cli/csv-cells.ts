/** One cell of a line and where it stands. */
export interface Cell {
  readonly text: string;
  /** Of its first character, from 1. */
  readonly column: number;
}

/** The cells of one line (RFC 4180, as far as numbers and names need it: a quoted cell holds no comma). */
export function cellsOf(line: string): readonly Cell[] {
  const cells: Cell[] = [];
  let start = 0;
  for (const piece of line.split(',')) {
    const trimmed = piece.trim();
    const quoted = /^"([^"]*)"$/.exec(trimmed);
    cells.push({ text: quoted?.[1] ?? trimmed, column: start + piece.length - piece.trimStart().length + 1 });
    start += piece.length + 1;
  }
  return cells;
}

export interface Lines {
  /** Whole lines of a stream that comes in pieces, without their ends; an end may be LF or CR LF. */
  push(text: string): Iterable<string>;
  /** What stands after the last line end. */
  rest(): string;
}

/** Far past any row of readings; what is longer is no such file. */
export const LINE_CHARACTERS_MAX = 65_536;

/** Bounded: a line that grows past `LINE_CHARACTERS_MAX` is handed out as it is, in pieces. */
export function lines(): Lines {
  let kept = '';
  return {
    *push(text) {
      const pieces = (kept + text).split('\n');
      kept = pieces.pop() ?? '';
      for (const piece of pieces) yield piece.endsWith('\r') ? piece.slice(0, -1) : piece;
      if (kept.length <= LINE_CHARACTERS_MAX) return;
      const long = kept;
      kept = '';
      yield long;
    },
    rest: () => kept,
  };
}
