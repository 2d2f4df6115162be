import { despike } from '../leader/despike.ts';
import type { Stamped } from './source.ts';

/** A reading on its way from the wire to the source: reused once delivered. */
type Pooled = Extract<Stamped, { kind: 'reading' }>;

/**
 * Gives the readings of one chunk their stamps. Bytes come in bursts (a USB packet, a network segment), readings were
 * taken evenly: the last one of a chunk is stamped with its arrival, earlier ones back by the board's own clock, or, if
 * it has none, by the median interval.
 */
export interface Stamps {
  /** Keeps one reading of the chunk that arrived at `nowUs`; a chunk longer than the pool goes on in portions. */
  add(nowUs: number, counts: Float64Array, boardUs: number): void;
  /** The chunk is over: its readings go on, in order. */
  flush(nowUs: number): void;
}

/** More readings in one chunk than any sane board sends between two turns of the loop. */
const POOL = 64;
/** Chunks whose spacing is remembered for the median. */
const WINDOW = 15;

export function stamps(inputs: number, emit: (event: Stamped) => void): Stamps {
  const pool = Array.from(
    { length: POOL },
    (): Pooled => ({ kind: 'reading', tUs: 0, counts: new Float64Array(inputs) }),
  );
  const boardUs = new Float64Array(POOL);
  const spacing = new Float64Array(1);
  const interval = new Float64Array(1);
  const median = despike([WINDOW]);
  const before = { us: Number.NaN };
  let held = 0;

  const flush = (nowUs: number): void => {
    if (held === 0) return;
    const lastBoardUs = boardUs[held - 1] as number;
    // The median is only for boards without a clock, and the dearest part of a chunk.
    if (Number.isNaN(lastBoardUs) && !Number.isNaN(before.us)) {
      spacing[0] = (nowUs - before.us) / held;
      median.push(0, spacing, interval);
    }
    const earliestUs = Number.isNaN(before.us) ? Number.NEGATIVE_INFINITY : before.us;
    before.us = nowUs;
    const count = held;
    held = 0;
    for (let i = 0; i < count; i++) {
      const event = pool[i] as Pooled;
      const byBoard = lastBoardUs - (boardUs[i] as number);
      const backUs = Math.round(Number.isNaN(byBoard) ? (count - 1 - i) * (interval[0] as number) : byBoard);
      // Whatever a board's clock says, across a restart too: no reading is of the future, nor of before the last chunk.
      event.tUs = Math.min(Math.max(nowUs - backUs, earliestUs), nowUs);
      emit(event);
    }
  };

  return {
    add(nowUs, counts, time) {
      const event = pool[held] as Pooled;
      event.counts.set(counts);
      boardUs[held] = time;
      held++;
      if (held === POOL) flush(nowUs);
    },
    flush,
  };
}
