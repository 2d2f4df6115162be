import { takeSchema } from './columns.ts';
import type { TakeDisk } from './disk.ts';
import { diskFault, takeFault, type TakeFault } from './fault.ts';
import type { headerMetadata, TakeHeader } from './header.ts';
import { page as makePage } from './page.ts';
import { row as makeRow, type Row } from './row.ts';
import { arrowStream, END_MARK } from './stream.ts';

/** Rows in, an Arrow stream out. Nothing here waits, and nothing grows with the length of the take. */
export interface TakeWriter {
  /** Fill it, then `append`: one that is stamped before the row that came before it gets that one's stamp. */
  readonly row: Row;
  readonly is: Readonly<WriterStanding>;
  append(): void;
  /** Hands the rows so far to the disk as one batch. */
  flush(): void;
  /** Brings what has been written to the disk itself, unless that is under way already. */
  sync(): void;
  /** Ends the take on a disk that has written when its call returns. */
  finish(): void;
  /** Ends the take with its end mark; resolves with why it is not whole, or null. */
  end(): Promise<TakeFault | null>;
}

export interface WriterStanding {
  rows: number;
  /** Bytes that the disk has taken, in whole batches. */
  bytes: number;
  /** Why no more is written; null: all is well. */
  fault: TakeFault | null;
}

const PAGE_ROWS = 1024;
/** Batches that wait for a slow disk; more than that is memory that grows with the take. */
const WAITING_BYTES_MAX = 32 * 1024 * 1024;

export function takeWriter(
  name: string,
  header: TakeHeader,
  profiles: Parameters<typeof headerMetadata>[1],
  disk: TakeDisk,
): TakeWriter {
  const schema = takeSchema(header, profiles);
  const stream = arrowStream(schema);
  const page = makePage(header, schema, PAGE_ROWS);
  const row = makeRow(header);
  const waiting: Uint8Array[] = [];
  const is: WriterStanding = { rows: 0, bytes: 0, fault: null };
  let waitingBytes = 0;
  let lastUs = 0;
  let leaving = false;
  let syncing = false;
  let syncedBytes = 0;
  let idle: (() => void) | null = null;

  const send = (bytes: Uint8Array): void => {
    if (is.fault !== null) return;
    if (waitingBytes + bytes.length > WAITING_BYTES_MAX) {
      fail(takeFault('TAKE_DISK_SLOW', name, 'the disk does not keep up'));
      return;
    }
    waiting.push(bytes);
    waitingBytes += bytes.length;
    next();
  };

  const next = (): void => {
    if (leaving) return;
    const bytes = waiting.shift();
    if (bytes === undefined) {
      settle();
      return;
    }
    leaving = true;
    disk.write(bytes, (error) => {
      leaving = false;
      if (error === null) {
        waitingBytes -= bytes.length;
        is.bytes += bytes.length;
        next();
      } else fail(diskFault(name, error));
    });
  };

  const fail = (fault: TakeFault): void => {
    is.fault = fault;
    waiting.length = 0;
    waitingBytes = 0;
    settle();
  };

  const settle = (): void => {
    if (!leaving && !syncing) idle?.();
  };

  const quiet = (): Promise<void> =>
    new Promise((resolve) => {
      idle = () => {
        idle = null;
        resolve();
      };
      settle();
    });

  const flush = (): void => {
    if (page.rows === 0) return;
    if (is.fault === null) send(stream.encode(page.batch()));
    page.clear();
  };

  const step = (call: (done: (error: unknown) => void) => void): Promise<unknown> => new Promise(call);

  send(stream.head);
  return {
    row,
    is,
    append() {
      if (is.fault !== null) return;
      // A reader takes no batch in which time goes back: a clock that jumped must not cost the rows around it.
      if (!(row.tUs >= lastUs)) row.tUs = lastUs;
      lastUs = row.tUs;
      page.append(row);
      is.rows++;
      if (page.full) flush();
    },
    flush,
    sync() {
      if (syncing || is.bytes === syncedBytes || is.fault !== null) return;
      syncing = true;
      const upTo = is.bytes;
      disk.sync((error) => {
        syncing = false;
        if (error === null) {
          syncedBytes = upTo;
          settle();
        } else fail(diskFault(name, error));
      });
    },
    finish() {
      flush();
      send(END_MARK);
    },
    async end() {
      flush();
      await quiet();
      // A batch that went in only in part is cut off, so that the end mark stands where a reader looks for it.
      if (is.fault !== null) await step((done) => disk.truncate(is.bytes, done));
      const ended = await step((done) => disk.write(END_MARK, done));
      const synced = ended ?? (await step((done) => disk.sync(done)));
      const closed = synced ?? (await step((done) => disk.close(done)));
      if (closed !== null && closed !== undefined) is.fault ??= diskFault(name, closed);
      return is.fault;
    },
  };
}
