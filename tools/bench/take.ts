import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { memories, type TakeMemory } from './take-memory.ts';
import { type Rate, rates } from './take-rates.ts';
import { FOLLOWERS, INTERVAL_US, opened, repeated, scenery } from './take-scene.ts';
import { JOINTS } from './scene.ts';
import { median, quantile } from './task.ts';

/** What recording costs, how fast a take is opened, shown and exported beside a plain Arrow copy, and how much memory each takes. */
export interface TakeFigures {
  /** Of one core, at 1 kHz with 8 joints and 3 followers. */
  readonly recordingShare: number;
  /** 99 in 100 readings are handled in this much more time with a recording than without, microseconds; and the slowest. */
  readonly addedP99Us: number;
  readonly worstUs: number;
  readonly minutes: number;
  readonly rows: number;
  readonly megabytes: number;
  readonly rates: readonly Rate[];
  readonly memory: readonly TakeMemory[];
}

export interface TakeSize {
  /** Recorded at 1 kHz. */
  readonly readings: number;
  /** Takes of so many times that: a short and a long one of what is opened, shown and exported. */
  readonly times: readonly [number, number];
  /** And of what is recorded and played to see its memory. */
  readonly played: readonly [number, number];
  readonly rounds: number;
}

/** The whole one is an hour. */
export const TAKE_SIZES = {
  whole: { readings: 60_000, times: [6, 60], played: [1, 10], rounds: 3 },
  tiny: { readings: 1_000, times: [1, 2], played: [1, 2], rounds: 1 },
} as const satisfies Record<string, TakeSize>;

/** Readings between two turns of the loop, in which the disk is heard. */
const TURN = 100;
const WARM_UP = 5_000;

export async function takeFigures(size: TakeSize): Promise<TakeFigures> {
  const folder = mkdtempSync(join(tmpdir(), 'eidograph-bench-'));
  try {
    const recorded = join(folder, 'recorded.arrows');
    const costs = await recordingCosts(recorded, size);
    const made = new Map<number, string>();
    const times = (count: number): string => {
      const file = made.get(count) ?? repeated(recorded, folder, count);
      made.set(count, file);
      return file;
    };
    const [short, long] = size.times.map(times) as [string, string];
    const played = size.played.map(times) as [string, string];
    const take = opened(long);
    take.close();
    return {
      ...costs,
      minutes: (size.readings * size.times[1] * INTERVAL_US) / 60e6,
      rows: take.rows,
      megabytes: take.bytes / 1e6,
      rates: rates(long, size.rounds),
      memory: await memories({ record: played, show: [short, long], play: played, export: [short, long] }),
    };
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

type Costs = Pick<TakeFigures, 'recordingShare' | 'addedP99Us' | 'worstUs'>;

/** @param file of the last take that is recorded, which stays */
async function recordingCosts(file: string, { readings, rounds }: TakeSize): Promise<Costs> {
  // The first pair only warms: a cold process would be what is measured.
  await handled(`${file}.warm`, Math.min(readings, WARM_UP));
  await handled(null, Math.min(readings, WARM_UP));
  const pairs: { readonly plain: Handled; readonly recorded: Handled }[] = [];
  for (let round = 0; round < rounds; round++) {
    rmSync(file, { force: true });
    pairs.push({ plain: await handled(null, readings), recorded: await handled(file, readings) });
  }
  return {
    recordingShare: median(pairs.map(({ plain, recorded }) => recorded.cpuUs - plain.cpuUs)) / (readings * INTERVAL_US),
    addedP99Us: median(pairs.map(({ plain, recorded }) => recorded.p99Us - plain.p99Us)),
    worstUs: median(pairs.map(({ recorded }) => recorded.worstUs)),
  };
}

interface Handled {
  readonly cpuUs: number;
  readonly p99Us: number;
  readonly worstUs: number;
}

/** @param file null: nothing is recorded */
async function handled(file: string | null, readings: number): Promise<Handled> {
  const { read, recorder, settled } = scenery(file);
  const times = new Float64Array(readings);
  const before = process.cpuUsage();
  for (let k = 0; k < readings; k++) {
    const begun = performance.now();
    read(k);
    times[k] = 1e3 * (performance.now() - begun);
    if (k % TURN === 0) await settled();
  }
  const { user, system } = process.cpuUsage(before);
  const fault = (await recorder?.end()) ?? null;
  if (fault !== null) throw new Error(fault.detail);
  times.sort();
  return { cpuUs: user + system, p99Us: quantile(times, 0.99), worstUs: quantile(times, 1) };
}

export function takeReport(figures: TakeFigures): string {
  const { recordingShare, addedP99Us, worstUs, minutes, rows, megabytes } = figures;
  return [
    '',
    `Recording ${JOINTS} joints and ${FOLLOWERS} followers at 1 kHz: ${(100 * recordingShare).toFixed(2)} % of a core (asked: under 5 %),`,
    `  p99 of a reading's handling ${addedP99Us.toFixed(0)} us more (asked: under 1,000); the slowest of all took ${worstUs.toFixed(0)} us`,
    `A take of ${minutes.toFixed(1)} minutes, ${rows} rows, ${megabytes.toFixed(0)} MB; rows a second, and times a plain Arrow copy:`,
    ...figures.rates.map(
      ({ what, rowsPerS, overCopy, asked }) =>
        `  ${what.padEnd(22)}${rowsPerS.toFixed(0).padStart(10)}   ${overCopy.toFixed(2)}${asked === null ? '' : `   asked: at most ${asked}, ${overCopy <= asked ? 'met' : 'not met'}`}`,
    ),
    'Peak memory of a process that does it with a short take and with one about ten times as long, MB:',
    ...figures.memory.map(
      ({ what, peakMegabytes: [short, long] }) =>
        `  ${what.padEnd(22)}${short.toFixed(0).padStart(10)}   ${long.toFixed(0)}`,
    ),
  ].join('\n');
}
