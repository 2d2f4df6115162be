import { NUMBER_BYTES_MAX, putNumber } from './digits.ts';
import { NAME_BYTES_MAX, type Row } from './row.ts';
import type { MakeSheet } from './sheet.ts';
import type { TableColumn } from './table.ts';

/** Written out whenever this much is ready, bytes. */
const PORTION = 256 * 1024;
/** Two signs of text for one, and the quotes: what a name may become. */
const TEXT_BYTES_MAX = 2 * NAME_BYTES_MAX + 2;
/** Words of codes are few; names of marks may be as many as there are rows. */
const TEXTS_KEPT = 1_000;

const LOOPED_BYTES = 48;

const COMMA = 0x2c;
const NEWLINE = 0x0a;

/**
 * CSV after RFC 4180, lines ended by LF; numbers with up to six decimals, an empty cell where nothing is known. Most cells
 * of an event are those of the event before: runs of them are copied from its line in one piece.
 */
export const csvSheet: MakeSheet = (columns, withTake, write) => {
  const out = new Uint8Array(PORTION + TEXT_BYTES_MAX + NUMBER_BYTES_MAX * columns.length * 4);
  const encoder = new TextEncoder();
  const numbers = new Float64Array(columns.length);
  const words = columns.map(() => '');
  /** Where each cell of the line before begins, and behind the last comma of it; nothing is known of no line. */
  const begins = new Int32Array(columns.length + 1);
  const texts = new Map<string, Uint8Array>();
  let hasLine = false;
  let at = 0;

  const textOf = (value: string): Uint8Array => {
    const known = texts.get(value);
    if (known !== undefined) return known;
    const made = encoder.encode(/[",\r\n]/.test(value) ? `"${value.replaceAll('"', '""')}"` : value);
    if (texts.size < TEXTS_KEPT) texts.set(value, made);
    return made;
  };

  const putText = (value: string): void => {
    const bytes = textOf(value);
    out.set(bytes, at);
    at += bytes.length;
  };

  /** Whether a cell says what it said in the line before; keeps what it says now. */
  const isSame = (column: TableColumn, i: number, row: Row): boolean => {
    if (column.kind === 'text') {
      const word = column.of(row);
      if (word === words[i]) return hasLine;
      words[i] = word;
      return false;
    }
    const value = column.of(row);
    const before = numbers[i] as number;
    if (value === before || (Number.isNaN(value) && Number.isNaN(before))) return hasLine;
    numbers[i] = value;
    return false;
  };

  const put = (column: TableColumn, i: number): void => {
    if (column.kind === 'text') putText(words[i] as string);
    else if (!Number.isNaN(numbers[i])) at = putNumber(numbers[i] as number, out, at);
  };

  /** Copies cells `first` to before `next` of the line before, each with its comma. */
  const copy = (first: number, next: number): void => {
    const from = begins[first] as number;
    const to = begins[next] as number;
    const by = at - from;
    // A call costs more than a few bytes.
    if (to - from > LOOPED_BYTES) out.copyWithin(at, from, to);
    else for (let k = from; k < to; k++) out[k + by] = out[k] as number;
    for (let i = first; i < next; i++) begins[i] = (begins[i] as number) + by;
    at += to - from;
  };

  const flush = (): void => {
    if (at > 0) write(out.slice(0, at));
    at = 0;
    hasLine = false;
  };

  const header = [...(withTake ? ['take'] : []), ...columns.map(({ name }) => name)];
  for (const [i, name] of header.entries()) {
    if (i > 0) out[at++] = COMMA;
    putText(name);
  }
  out[at++] = NEWLINE;
  flush();

  return {
    add(take, row) {
      if (withTake) {
        putText(take);
        out[at++] = COMMA;
      }
      let same = 0;
      for (let i = 0; i < columns.length; i++) {
        const column = columns[i] as TableColumn;
        if (isSame(column, i, row)) continue;
        copy(same, i);
        begins[i] = at;
        put(column, i);
        out[at++] = COMMA;
        same = i + 1;
      }
      copy(same, columns.length);
      begins[columns.length] = at;
      // The last comma ends the line.
      out[at - 1] = NEWLINE;
      hasLine = true;
      if (at >= PORTION) flush();
    },
    end: flush,
  };
};
