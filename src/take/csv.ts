import type { MakeSheet } from './sheet.ts';
import type { TableColumn } from './table.ts';

/** Written out whenever this much is ready, bytes. */
const PORTION = 256 * 1024;
/** Room kept for one row beyond the portion: names are at most a page's text. */
const ROW_MAX = 128 * 1024;
/** Decimals of a number: a millionth of a degree is far below any servo. */
const DECIMALS = 1e6;
/** Past this a fixed-point number would lose its last decimals. */
const FIXED_MAX = 1e9;

const ZERO = 0x30;
const COMMA = 0x2c;
const NEWLINE = 0x0a;
const MINUS = 0x2d;
const POINT = 0x2e;

/**
 * CSV after RFC 4180, lines ended by LF; numbers with up to six decimals, an empty cell where nothing is known. Most numbers
 * of an event are those of the event before: their digits are kept rather than made anew.
 */
export const csvSheet: MakeSheet = (columns, withTake, write) => {
  const out = new Uint8Array(PORTION + ROW_MAX + 64 * columns.length);
  const encoder = new TextEncoder();
  const before = new Float64Array(columns.length).fill(Number.NaN);
  const cells = Array.from(columns, () => new Uint8Array(32));
  const lengths = new Uint8Array(columns.length);
  const texts = new Map<string, Uint8Array>();
  let at = 0;

  const put = (bytes: Uint8Array, length: number): void => {
    for (let i = 0; i < length; i++) out[at + i] = bytes[i] as number;
    at += length;
  };

  const textOf = (value: string): Uint8Array => {
    const known = texts.get(value);
    if (known !== undefined) return known;
    const made = encoder.encode(/[",\r\n]/.test(value) ? `"${value.replaceAll('"', '""')}"` : value);
    // Words of codes recur without end; names of marks may be as many as there are rows.
    if (texts.size < 1000) texts.set(value, made);
    return made;
  };

  const cell = (column: TableColumn, i: number, row: Parameters<TableColumn['of']>[0]): void => {
    if (column.kind === 'text') {
      const bytes = textOf(column.of(row));
      put(bytes, bytes.length);
      return;
    }
    const value = column.of(row);
    if (value !== before[i] || i === 0) {
      lengths[i] = Number.isNaN(value) ? 0 : digits(value, cells[i] as Uint8Array, encoder);
      before[i] = value;
    }
    put(cells[i] as Uint8Array, Number.isNaN(value) ? 0 : (lengths[i] as number));
  };

  const flush = (): void => {
    if (at > 0) write(out.slice(0, at));
    at = 0;
  };

  const header = [...(withTake ? ['take'] : []), ...columns.map(({ name }) => name)];
  write(encoder.encode(`${header.map((name) => new TextDecoder().decode(textOf(name))).join(',')}\n`));
  return {
    add(take, row) {
      if (withTake) {
        const bytes = textOf(take);
        put(bytes, bytes.length);
        out[at++] = COMMA;
      }
      for (let i = 0; i < columns.length; i++) {
        if (i > 0) out[at++] = COMMA;
        cell(columns[i] as TableColumn, i, row);
      }
      out[at++] = NEWLINE;
      if (at >= PORTION) flush();
    },
    end: flush,
  };
};

/** Writes a number's digits; returns how many bytes they are. */
function digits(value: number, into: Uint8Array, encoder: InstanceType<typeof TextEncoder>): number {
  const size = Math.abs(value);
  if (!(size < FIXED_MAX)) return encoder.encodeInto(`${value}`, into).written;
  let fixed = Math.round(size * DECIMALS);
  if (fixed === 0) {
    into[0] = ZERO;
    return 1;
  }
  let at = 0;
  if (value < 0) into[at++] = MINUS;
  let whole = Math.floor(fixed / DECIMALS);
  fixed -= whole * DECIMALS;
  let places = 1;
  for (let power = 10; power <= whole; power *= 10) places++;
  for (let i = places - 1; i >= 0; i--) {
    const rest = Math.floor(whole / 10);
    into[at + i] = ZERO + (whole - 10 * rest);
    whole = rest;
  }
  at += places;
  if (fixed === 0) return at;
  into[at++] = POINT;
  for (let power = DECIMALS / 10; fixed > 0; power /= 10) {
    const digit = Math.floor(fixed / power);
    into[at++] = ZERO + digit;
    fixed -= digit * power;
  }
  return at;
}
