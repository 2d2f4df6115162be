import { NAME_BUFFER, TIME_BUFFER } from './columns.ts';
import { type Frame, frameAt, frameEnd, PREFIX_BYTES, type ReadAt } from './framing.ts';

/** What stands where in a take's file, from its frames. Grows by a few numbers a batch, four of them a second. */
export interface TakeIndex {
  readonly batches: readonly BatchPlace[];
  readonly rows: number;
  readonly lastUs: number;
  /** Up to here everything is whole. */
  readonly endBytes: number;
  /** It ends with its end mark. */
  readonly whole: boolean;
}

export interface BatchPlace {
  readonly offset: number;
  readonly bytes: number;
  readonly rows: number;
  readonly firstUs: number;
  /** It has a row with a name: a mark. */
  readonly named: boolean;
}

/** @param from where the first batch begins */
export function indexOf(from: number, size: number, read: ReadAt): TakeIndex {
  const batches: BatchPlace[] = [];
  let offset = from;
  let rows = 0;
  let lastUs = 0;
  for (;;) {
    const frame = frameAt(offset, size, read, [TIME_BUFFER, NAME_BUFFER]);
    if (frame === 'end' || frame === 'broken')
      return { batches, rows, lastUs, endBytes: offset, whole: frame === 'end' };
    if (frame.kind === 'batch' && frame.rows > 0) {
      const [time, name] = frame.buffers;
      const instants = time === undefined || time.bytes < 8 * frame.rows ? null : timesOf(frame, time.offset, read);
      // Time goes forward in a take: what says otherwise is not what was written.
      if (instants === null || instants.firstUs < lastUs || instants.lastUs < instants.firstUs)
        return { batches, rows, lastUs, endBytes: offset, whole: false };
      const bytes = frameEnd(frame) - offset;
      batches.push({ offset, bytes, rows: frame.rows, firstUs: instants.firstUs, named: (name?.bytes ?? 0) > 0 });
      rows += frame.rows;
      lastUs = instants.lastUs;
    }
    offset = frameEnd(frame);
  }
}

function timesOf(
  frame: Frame,
  timeOffset: number,
  read: ReadAt,
): { readonly firstUs: number; readonly lastUs: number } {
  const at = frame.offset + PREFIX_BYTES + frame.metadataBytes + timeOffset;
  return { firstUs: int64(read(at, 8)), lastUs: int64(read(at + 8 * (frame.rows - 1), 8)) };
}

function int64(bytes: Uint8Array): number {
  return Number(new DataView(bytes.buffer, bytes.byteOffset, 8).getBigInt64(0, true));
}
