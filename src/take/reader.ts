import { closeSync, fstatSync, openSync } from 'node:fs';
import { basename } from 'node:path';
import { RecordBatchReader, type Schema } from 'apache-arrow';
import { strangeColumn } from './columns.ts';
import { diskFault, takeFault, type TakeFault } from './fault.ts';
import { fileWindow } from './file-window.ts';
import { bodyAt, type Frame, frameAt, frameEnd } from './framing.ts';
import { headerFrom, PROFILES_KEY, type TakeHeader } from './header.ts';
import { type BatchPlace, indexOf } from './batch-index.ts';
import { fetcher } from './read-ahead.ts';
import { pageReader } from './page-reader.ts';
import type { Row } from './row.ts';
import { isBoundedSchema } from './schema-bounds.ts';
import { END_MARK } from './stream.ts';

/** A take that can be read from any of its moments on, one batch in memory at a time. */
export interface Take {
  readonly name: string;
  readonly header: TakeHeader;
  /** The rig's files as they were, JSON text. */
  readonly profiles: string;
  readonly rows: number;
  /** Stamp of the last row, integer microseconds. */
  readonly durationUs: number;
  readonly bytes: number;
  /** null: it ends with its end mark; otherwise how many bytes at its end are not whole. */
  readonly lostBytes: number | null;
  /** Rows met so far that stood in damaged batches, and were left out. */
  readonly damagedRows: number;
  /** The first `MARKS_MAX`, in order. */
  readonly marks: readonly Mark[];
  /** Every row from `fromUs` on, in order, in a reused row; some that stand before it come first, if there are any. */
  readFrom(fromUs: number): Iterable<Row>;
  /** Has the system bring this stretch into its memory without waiting for it, so that reading it is quick. */
  fetch(fromUs: number, toUs: number): void;
  close(): void;
}

export interface Mark {
  readonly name: string;
  readonly tUs: number;
}

const MARKS_MAX = 10_000;
/** What a frame tells and its first stamps fit in here, so that opening reads little of a long take. */
const INDEX_WINDOW_BYTES = 16 * 1024;
const WINDOW_BYTES = 1024 * 1024;

const FETCHED_BYTES_MAX = 16 * 1024 * 1024;

/** Opens a take and judges every frame of it; a cut one opens with what is whole. */
export function openTake(file: string): Take | TakeFault {
  const name = basename(file, '.arrows');
  let descriptor = -1;
  try {
    descriptor = openSync(file, 'r');
    const opened = judge(name, descriptor);
    if ('code' in opened) closeSync(descriptor);
    return opened;
  } catch (error) {
    if (descriptor >= 0) closeSync(descriptor);
    if (error instanceof Error && 'code' in error) return diskFault(name, error);
    throw error;
  }
}

function judge(name: string, descriptor: number): Take | TakeFault {
  const stat = fstatSync(descriptor);
  if (!stat.isFile()) return takeFault('TAKE_FOREIGN', name, 'it is no file');
  const { size } = stat;
  if (size === 0) return takeFault('TAKE_EMPTY', name, 'there is nothing in it');
  const read = fileWindow(descriptor, INDEX_WINDOW_BYTES);
  const first = frameAt(0, size, read, []);
  if (first === 'end' || first === 'broken' || first.kind !== 'schema')
    return takeFault('TAKE_FOREIGN', name, 'it is no Arrow stream, or was cut before its first row');
  const head = read(0, frameEnd(first)).slice();
  const schema = schemaOf(head, first);
  const header = schema === null ? 'foreign' : headerFrom(schema.metadata);
  if (schema === null || header === 'foreign')
    return takeFault('TAKE_FOREIGN', name, 'it is an Arrow stream, but no take');
  if (header === 'newer') return takeFault('TAKE_NEWER', name, 'it was made by a newer eidograph');
  const strange = strangeColumn(header, schema);
  if (strange !== null)
    return takeFault('TAKE_FOREIGN', name, `its columns are not those of a take, from "${strange}" on`);

  const found = indexOf(frameEnd(first), size, fileWindow(descriptor, INDEX_WINDOW_BYTES));
  if (found.rows === 0 && !found.whole)
    return takeFault('TAKE_EMPTY', name, 'it was cut before its first rows were written');

  let damagedRows = 0;
  /** Rows of the batches that begin at `fromByte` or after it and before `toByte`. */
  const rowsOf = function* (fromByte: number, toByte: number): Generator<Row> {
    const page = pageReader(header);
    const readNext = fileWindow(descriptor, WINDOW_BYTES);
    for (let offset = fromByte; offset < toByte; ) {
      const frame = frameAt(offset, found.endBytes, readNext, page.buffers);
      // Somebody has written into the file since it was opened.
      if (frame === 'end' || frame === 'broken') return;
      offset = frameEnd(frame);
      if (frame.kind !== 'batch' || frame.rows === 0) continue;
      if (!page.open(frame, readNext(bodyAt(frame), frame.bodyBytes))) damagedRows += frame.rows;
      else for (let r = 0; r < frame.rows; r++) yield page.row(r);
    }
  };
  const marks: Mark[] = [];
  for (const offset of found.named)
    for (const row of rowsOf(offset, offset + 1))
      if (row.name !== '' && marks.length < MARKS_MAX) marks.push({ name: row.name, tUs: row.tUs });
  damagedRows = 0;
  const pages = fetcher(descriptor);

  return {
    name,
    header,
    profiles: schema.metadata.get(PROFILES_KEY) ?? 'null',
    rows: found.rows,
    durationUs: found.lastUs,
    bytes: size,
    lostBytes: found.whole ? null : size - found.endBytes,
    get damagedRows() {
      return damagedRows;
    },
    marks,
    readFrom: (fromUs) => ({
      [Symbol.iterator]: () => rowsOf(placeFor(found.places, fromUs), found.endBytes),
    }),
    fetch(fromUs, toUs) {
      const from = placeFor(found.places, fromUs);
      // Up to the place after the last one that is wanted.
      const next = found.places[placesBefore(found.places, toUs)]?.offset ?? found.endBytes;
      pages.fetch(from, Math.min(next, from + FETCHED_BYTES_MAX));
    },
    close() {
      pages.end();
      closeSync(descriptor);
    },
  };
}

/** The last place that begins before `tUs`: rows at that very instant may stand at its end. */
function placeFor(places: readonly BatchPlace[], tUs: number): number {
  return places[Math.max(0, placesBefore(places, tUs) - 1)]?.offset ?? Number.POSITIVE_INFINITY;
}

function placesBefore(places: readonly BatchPlace[], tUs: number): number {
  let low = 0;
  let high = places.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if ((places[middle] as BatchPlace).firstUs < tUs) low = middle + 1;
    else high = middle;
  }
  return low;
}

/** null where Arrow cannot make sense of it: damaged bytes make it throw errors of many kinds. */
function schemaOf(head: Uint8Array, first: Frame): Schema | null {
  const metadata = head.subarray(bodyAt(first) - first.metadataBytes, bodyAt(first));
  if (!isBoundedSchema(new DataView(metadata.buffer, metadata.byteOffset, metadata.byteLength))) return null;
  try {
    return RecordBatchReader.from([head, END_MARK]).open().schema;
  } catch {
    return null;
  }
}
