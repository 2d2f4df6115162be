import { read } from 'node:fs';
import { US_PER_S } from '../clock/clock.ts';
import type { Row } from './row.ts';

/** Has the system bring parts of a file into its memory, on another thread. */
export interface Fetcher {
  /** From one byte to another; nothing where it is still busy with the last part. */
  fetch(fromByte: number, toByte: number): void;
  end(): void;
}

const PIECE_BYTES = 1024 * 1024;

export function fetcher(descriptor: number): Fetcher {
  let scratch: Uint8Array | null = null;
  let isBusy = false;
  let isOver = false;
  const piece = (at: number, toByte: number): void => {
    isBusy = !isOver && at < toByte;
    if (!isBusy) return;
    scratch ??= new Uint8Array(PIECE_BYTES);
    // What is read is not looked at: that it is in the system's memory is enough, and what fails fails again where it counts.
    read(descriptor, scratch, 0, Math.min(PIECE_BYTES, toByte - at), at, (_, got) =>
      piece(got > 0 ? at + got : toByte, toByte),
    );
  };
  return {
    fetch(fromByte, toByte) {
      if (!isBusy) piece(fromByte, toByte);
    },
    end() {
      isOver = true;
    },
  };
}

/** So much of a take is brought into memory before it is due. */
const AHEAD_US = 3 * US_PER_S;
/** How often somebody looks whether that is so, on the take's own time. */
const LOOK_US = US_PER_S;

/** A take as far as it is read ahead. */
interface Ahead {
  readFrom(fromUs: number): Iterable<Row>;
  fetch(fromUs: number, toUs: number): void;
}

/** The same take for one who plays it: no row waits for the disk, because the system has fetched it while others played. */
export function readingAhead<T extends Ahead>(take: T): T {
  const readFrom = function* (fromUs: number): Generator<Row> {
    let lookUs = fromUs;
    for (const row of take.readFrom(fromUs)) {
      if (row.tUs >= lookUs) {
        take.fetch(row.tUs, row.tUs + AHEAD_US);
        lookUs = row.tUs + LOOK_US;
      }
      yield row;
    }
  };
  return { ...take, readFrom: (fromUs: number) => ({ [Symbol.iterator]: () => readFrom(fromUs) }) };
}
