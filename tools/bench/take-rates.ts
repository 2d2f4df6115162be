import { closeSync, openSync, readSync, writeSync } from 'node:fs';
import { devNull } from 'node:os';
import { RecordBatchReader } from 'apache-arrow';
import { type ExportFormat, exportTakes } from '../../src/take/export.ts';
import type { Take } from '../../src/take/reader.ts';
import { arrowStream, END_MARK } from '../../src/take/stream.ts';
import { summarize } from '../../src/take/summary.ts';
import { opened } from './take-scene.ts';
import { median } from './task.ts';

/** How fast something is done with a take. */
export interface Rate {
  readonly what: string;
  readonly rowsPerS: number;
  /** Its time over that of a plain Arrow copy of the same bytes, paired round by round. */
  readonly overCopy: number;
  /** What was asked of that, where something was. */
  readonly asked: number | null;
}

/** The limit: Arrow alone reads every batch and writes it again. */
const COPY = 'a plain Arrow copy';

/** What is written goes to the null device: the disk is nobody's merit. */
const WORKS: readonly {
  readonly what: string;
  readonly asked: number | null;
  /** Slow ones take part in the first round only. */
  readonly once: boolean;
  run(file: string): void;
}[] = [
  { what: COPY, asked: null, once: false, run: plainCopy },
  { what: 'open', asked: null, once: false, run: (file) => opened(file).close() },
  { what: 'show', asked: 2, once: false, run: (file) => whole(file, (take) => summarize(take)) },
  { what: 'export to CSV', asked: 5, once: false, run: (file) => exported(file, 'csv') },
  { what: 'export to JSON Lines', asked: null, once: true, run: (file) => exported(file, 'jsonl') },
  { what: 'export to Parquet', asked: null, once: true, run: (file) => exported(file, 'parquet') },
];

export function rates(file: string, rounds: number): readonly Rate[] {
  const take = opened(file);
  const { rows } = take;
  take.close();
  const times = WORKS.map((): number[] => []);
  for (let round = 0; round < rounds; round++) {
    for (const [i, { run, once }] of WORKS.entries()) {
      if (once && round > 0) continue;
      const begun = performance.now();
      run(file);
      times[i]?.push((performance.now() - begun) / 1e3);
    }
  }
  const [copies] = times as [number[], ...number[][]];
  return WORKS.map(({ what, asked }, i) => {
    const own = times[i] as number[];
    return {
      what,
      asked,
      rowsPerS: rows / median(own),
      overCopy: median(own.map((s, round) => s / (copies[round] as number))),
    };
  });
}

const PIECE_BYTES = 1024 * 1024;

function plainCopy(file: string): void {
  const from = openSync(file, 'r');
  const to = openSync(devNull, 'w');
  const pieces = function* (): Generator<Uint8Array> {
    for (;;) {
      const piece = new Uint8Array(PIECE_BYTES);
      const got = readSync(from, piece);
      if (got === 0) return;
      yield piece.subarray(0, got);
    }
  };
  const batches = RecordBatchReader.from(pieces()).open();
  const stream = arrowStream(batches.schema);
  writeSync(to, stream.head);
  for (const batch of batches) writeSync(to, stream.encode(batch));
  writeSync(to, END_MARK);
  closeSync(from);
  closeSync(to);
}

export function whole(file: string, work: (take: Take) => Generator<number, unknown>): void {
  const take = opened(file);
  const steps = work(take);
  while (steps.next().done !== true);
  take.close();
}

export function exported(file: string, format: ExportFormat): void {
  const out = openSync(devNull, 'w');
  const options = { format, columns: [], rateHz: null };
  whole(file, (take) => exportTakes([take], options, (bytes) => void writeSync(out, bytes)));
  closeSync(out);
}
