import { END_MARK } from './stream.ts';
import { NAME_BUFFER, TIME_BUFFER } from './columns.ts';
import { bodyAt, type Frame, frameAt, frameEnd, type ReadAt } from './framing.ts';

/** What stands where in a take's file, from its frames: of the same size however long the take is. */
export interface TakeIndex {
  /** Where to begin reading for a moment: some of its batches, in order. */
  readonly places: readonly BatchPlace[];
  /** Where the batches with a named row begin: marks. The first `NAMED_MAX` of them. */
  readonly named: readonly number[];
  readonly rows: number;
  readonly lastUs: number;
  /** Up to here everything is whole. */
  readonly endBytes: number;
  /** It ends with its end mark. */
  readonly whole: boolean;
}

export interface BatchPlace {
  readonly offset: number;
  readonly firstUs: number;
}

/** Twice as many at most: then every other place is given up. Ten hours leave one for each six seconds or so. */
const PLACES = 4_096;
const NAMED_MAX = 10_000;

/** @param from where the first batch begins */
export function indexOf(from: number, size: number, read: ReadAt): TakeIndex {
  let places: BatchPlace[] = [];
  const named: number[] = [];
  let every = 1;
  let batches = 0;
  let offset = from;
  let rows = 0;
  let lastUs = 0;
  for (;;) {
    const frame = frameAt(offset, size, read, [TIME_BUFFER, NAME_BUFFER]);
    if (frame === 'end' || frame === 'broken') {
      // An end with something after it is a length that was damaged to nothing.
      const whole = frame === 'end' && offset + END_MARK.length === size;
      return { places, named, rows, lastUs, endBytes: offset, whole };
    }
    if (frame.kind === 'batch' && frame.rows > 0) {
      const [time, name] = frame.buffers;
      const instants =
        time === null || time === undefined || time.bytes < 8 * frame.rows ? null : timesOf(frame, time.offset, read);
      // Time goes forward in a take: what says otherwise is not what was written.
      if (instants === null || instants.firstUs < lastUs || instants.lastUs < instants.firstUs)
        return { places, named, rows, lastUs, endBytes: offset, whole: false };
      if (batches % every === 0) places.push({ offset, firstUs: instants.firstUs });
      if (places.length === 2 * PLACES) {
        places = places.filter((_, i) => i % 2 === 0);
        every *= 2;
      }
      if ((name?.bytes ?? 0) > 0 && named.length < NAMED_MAX) named.push(offset);
      batches++;
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
  const at = bodyAt(frame) + timeOffset;
  return { firstUs: int64(read(at, 8)), lastUs: int64(read(at + 8 * (frame.rows - 1), 8)) };
}

function int64(bytes: Uint8Array): number {
  return Number(new DataView(bytes.buffer, bytes.byteOffset, 8).getBigInt64(0, true));
}
