/** Lines of toned text that fit a width. Every character here is one column wide; control characters are shown as `?`. */

/** What a piece of text is about; `paint` gives each tone its colour, and a word or shape always says the same. */
export type Tone = 'plain' | 'dim' | 'strong' | 'good' | 'moving' | 'waiting' | 'held' | 'bad' | 'off';

export interface Span {
  readonly text: string;
  readonly tone: Tone;
}

export type Line = readonly Span[];

export function span(text: string, tone: Tone = 'plain'): Span {
  return { text: printable(text), tone };
}

/** What comes from a board or a system call must not steer the terminal it is shown on. */
function printable(text: string): string {
  return text.replace(/\p{C}/gu, '?');
}

export function widthOf(line: Line): number {
  return line.reduce((sum, { text }) => sum + text.length, 0);
}

/** The line cut to `width` columns, its last one a mark that something is missing. */
export function clipped(line: Line, width: number, mark: string): Line {
  if (widthOf(line) <= width) return line;
  const kept: Span[] = [];
  let left = width - mark.length;
  for (const { text, tone } of line) {
    if (left <= 0) break;
    kept.push({ text: text.slice(0, left), tone });
    left -= text.length;
  }
  if (width >= mark.length) kept.push({ text: mark, tone: 'dim' });
  return kept;
}

/** The line with blanks up to `width`. */
export function padded(line: Line, width: number): Line {
  const missing = width - widthOf(line);
  return missing > 0 ? [...line, { text: ' '.repeat(missing), tone: 'plain' }] : line;
}

/** A part of a line, and how much it matters: what matters least goes first where there is no room. */
export interface Part {
  readonly line: Line;
  readonly matters: number;
}

/** The parts side by side, `gap` apart, without those that matter least as far as they do not fit. */
export function fitted(parts: readonly Part[], width: number, gap: number): Line {
  let kept = parts.filter(({ line }) => widthOf(line) > 0);
  const total = (): number => kept.reduce((sum, { line }) => sum + widthOf(line) + gap, -gap);
  while (kept.length > 1 && total() > width) {
    const least = Math.min(...kept.map(({ matters }) => matters));
    const last = kept.findLastIndex(({ matters }) => matters === least);
    kept = kept.filter((_, i) => i !== last);
  }
  return kept.flatMap(({ line }, i) => (i === 0 ? line : [{ text: ' '.repeat(gap), tone: 'plain' as const }, ...line]));
}

/** Cells in as many columns as fit, row by row; all of one width. */
export function inColumns(cells: readonly Line[], width: number, gap: number): readonly Line[] {
  const cellWidth = Math.max(0, ...cells.map(widthOf));
  const columns = columnsFor(cellWidth, width, gap);
  const rows: Line[] = [];
  for (let i = 0; i < cells.length; i += columns) {
    const row = cells.slice(i, i + columns).map((cell) => padded(cell, cellWidth + gap));
    rows.push(row.flat());
  }
  return rows;
}

export function columnsFor(cellWidth: number, width: number, gap: number): number {
  return Math.max(1, Math.floor((width + gap) / (cellWidth + gap)));
}

/** Text broken at blanks into pieces of at most `width`; a longer word is cut. */
export function wrapped(text: string, width: number): readonly string[] {
  const lines: string[] = [];
  let line = '';
  for (let word of text.split(' ')) {
    while (word.length > width && width > 0) {
      if (line !== '') lines.push(line);
      lines.push(word.slice(0, width));
      line = '';
      word = word.slice(width);
    }
    if (line === '') line = word;
    else if (line.length + 1 + word.length <= width) line += ` ${word}`;
    else {
      lines.push(line);
      line = word;
    }
  }
  if (line !== '') lines.push(line);
  return lines;
}
