import { closeSync, fstatSync, openSync, readSync } from 'node:fs';
import { basename } from 'node:path';
import { type RecordBatch, RecordBatchReader, type Schema } from 'apache-arrow';
import { strangeColumn } from './columns.ts';
import { diskFault, takeFault, type TakeFault } from './fault.ts';
import { frameAt, frameEnd, type ReadAt } from './framing.ts';
import { headerFrom, PROFILES_KEY, type TakeHeader } from './header.ts';
import { type BatchPlace, indexOf } from './batch-index.ts';
import { halves, pageReader, whole64 } from './page-reader.ts';
import type { Row } from './row.ts';
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
  readonly marks: readonly Mark[];
  /** Every row from the batch that holds `fromUs` on, in order, in a reused row; earlier rows of that batch come too. */
  readFrom(fromUs: number): Iterable<Row>;
  /** The batches as Arrow has them. */
  batches(): Iterable<RecordBatch>;
  close(): void;
}

export interface Mark {
  readonly name: string;
  readonly tUs: number;
}

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
  const read = reading(descriptor);
  const first = frameAt(0, size, read, []);
  if (first === 'end' || first === 'broken' || first.kind !== 'schema')
    return takeFault('TAKE_FOREIGN', name, 'it is no Arrow stream, or was cut before its first row');
  const head = read(0, frameEnd(first)).slice();
  const schema = schemaOf(head);
  const header = schema === null ? 'foreign' : headerFrom(schema.metadata);
  if (schema === null || header === 'foreign')
    return takeFault('TAKE_FOREIGN', name, 'it is an Arrow stream, but no take');
  if (header === 'newer') return takeFault('TAKE_NEWER', name, 'it was made by a newer eidograph');
  const strange = strangeColumn(header, schema);
  if (strange !== null)
    return takeFault('TAKE_FOREIGN', name, `its columns are not those of a take, from "${strange}" on`);

  const found = indexOf(frameEnd(first), size, read);
  if (found.rows === 0 && !found.whole)
    return takeFault('TAKE_EMPTY', name, 'it was cut before its first rows were written');

  let damagedRows = 0;
  const decoded = function* (places: readonly BatchPlace[]): Generator<RecordBatch> {
    const pieces = function* (): Generator<Uint8Array> {
      yield head;
      // Memory of its own each time: what is still read of one batch must not change with the next.
      for (const { offset, bytes } of places) yield read(offset, bytes).slice();
      yield END_MARK;
    };
    yield* RecordBatchReader.from(pieces());
  };
  const batches = function* (places: readonly BatchPlace[]): Generator<RecordBatch> {
    for (let i = 0; i < places.length; ) {
      try {
        for (const batch of decoded(places.slice(i))) {
          if (!isSound(batch, places[i]?.rows ?? 0)) break;
          i++;
          yield batch;
        }
        if (i === places.length) return;
      } catch (error) {
        // What damaged lengths make Arrow throw.
        if (!(error instanceof RangeError || error instanceof TypeError || isArrows(error))) throw error;
      }
      damagedRows += places[i]?.rows ?? 0;
      i++;
    }
  };
  const rowsOf = function* (places: readonly BatchPlace[]): Generator<Row> {
    const pages = pageReader(header);
    for (const batch of batches(places)) yield* pages.rows(batch);
  };
  const marks: Mark[] = [];
  for (const row of rowsOf(found.batches.filter(({ named }) => named)))
    if (row.name !== '') marks.push({ name: row.name, tUs: row.tUs });
  damagedRows = 0;

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
    readFrom: (fromUs) => ({ [Symbol.iterator]: () => rowsOf(found.batches.slice(batchAt(found.batches, fromUs))) }),
    batches: () => ({ [Symbol.iterator]: () => batches(found.batches) }),
    close: () => closeSync(descriptor),
  };
}

/** Every column has a value for every row, and time goes forward. */
function isSound(batch: RecordBatch, rows: number): boolean {
  const { children } = batch.data;
  return (
    batch.numRows === rows &&
    children.every(({ length, values, valueOffsets }) => {
      const enough = valueOffsets === undefined ? values?.length : valueOffsets.length - 1;
      return length === rows && (enough ?? 0) >= rows;
    }) &&
    goesForward(children[0]?.values as BigInt64Array)
  );
}

function goesForward(stamps: BigInt64Array): boolean {
  const parts = halves(stamps);
  let before = 0;
  for (let i = 0; i < parts.length; i += 2) {
    const tUs = whole64(parts, i);
    if (tUs < before || tUs > Number.MAX_SAFE_INTEGER) return false;
    before = tUs;
  }
  return true;
}

/** Arrow throws plain errors too, where a message is not the one it expects. */
function isArrows(error: unknown): boolean {
  return error instanceof Error && error.constructor === Error;
}

/** The last batch that begins before `tUs`: rows at that very instant may stand at its end. */
function batchAt(batches: readonly BatchPlace[], tUs: number): number {
  let low = 0;
  let high = batches.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if ((batches[middle] as BatchPlace).firstUs < tUs) low = middle + 1;
    else high = middle;
  }
  return Math.max(0, low - 1);
}

function reading(descriptor: number): ReadAt {
  let buffer = new Uint8Array(65_536);
  return (offset, bytes) => {
    if (buffer.length < bytes) buffer = new Uint8Array(bytes);
    let got = 0;
    while (got < bytes) {
      const more = readSync(descriptor, buffer, got, bytes - got, offset + got);
      if (more === 0) break;
      got += more;
    }
    return buffer.subarray(0, got);
  };
}

/** null where Arrow cannot make sense of it: damaged bytes make it throw errors of many kinds. */
function schemaOf(head: Uint8Array): Schema | null {
  try {
    return RecordBatchReader.from([head, END_MARK]).open().schema;
  } catch {
    return null;
  }
}
