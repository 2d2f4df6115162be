import { closeSync, mkdtempSync, openSync, readFileSync, rmSync, writeSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { RecordBatchReader, RecordBatchStreamWriter } from 'apache-arrow';
import { pipeline } from '../../src/bridge/pipeline.ts';
import { eventSource } from '../../src/bridge/source.ts';
import { virtualClock } from '../../src/clock/virtual.ts';
import { drive as makeDrive } from '../../src/drive/drive.ts';
import { newTakeFile, offlineDisk, wholeFile } from '../../src/take/disk.ts';
import { exportTakes } from '../../src/take/export.ts';
import { type TakeHeader, takeHeader } from '../../src/take/header.ts';
import { openTake, type Take } from '../../src/take/reader.ts';
import { recorder } from '../../src/take/recorder.ts';
import { summarize } from '../../src/take/summary.ts';
import { takeWriter } from '../../src/take/writer.ts';
import { JOINTS, scene } from './scene.ts';

/** What recording costs, and how fast a take is opened, shown and exported beside a plain Arrow copy of its bytes. */
export interface TakeFigures {
  /** Of one core, at 1 kHz with 8 joints and 3 followers. */
  readonly recordingShare: number;
  /** 99 in 100 readings are handled in this much more time with a recording than without, microseconds. */
  readonly addedP99Us: number;
  readonly rows: number;
  readonly megabytes: number;
  readonly rates: readonly { readonly what: string; readonly rowsPerS: number; readonly overCopy: number }[];
}

export interface TakeSize {
  readonly readings: number;
  readonly rows: number;
}

/** The whole one is an hour at 100 Hz. */
export const TAKE_SIZES = {
  whole: { readings: 60_000, rows: 360_000 },
  tiny: { readings: 1_000, rows: 2_000 },
} as const;

const FOLLOWERS = 3;
const INTERVAL_US = 1_000;
/** Readings between two turns of the loop, in which the disk is heard. */
const TURN = 100;

export async function takeFigures(size: TakeSize): Promise<TakeFigures> {
  const folder = mkdtempSync(join(tmpdir(), 'eidograph-bench-'));
  try {
    const costs = await recordingCosts(folder, size.readings);
    return { ...costs, ...readingRates(folder, size.rows) };
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

function header(): TakeHeader {
  const { plan } = scene(FOLLOWERS, 'frames');
  const inputs = plan.leader.joints.map(({ name }) => name);
  return takeHeader({ name: 'bench', plan }, inputs, 0, true, { by: 'record', parents: [], how: {} });
}

async function recordingCosts(
  folder: string,
  readings: number,
): Promise<{ recordingShare: number; addedP99Us: number }> {
  // The first pair only warms: a cold process would be what is measured.
  await handled(folder, 'warm', Math.min(readings, 5_000));
  await handled(null, 'warm', Math.min(readings, 5_000));
  const plain = await handled(null, 'plain', readings);
  const recorded = await handled(folder, 'recorded', readings);
  return {
    recordingShare: (recorded.cpuUs - plain.cpuUs) / (readings * INTERVAL_US),
    addedP99Us: recorded.p99Us - plain.p99Us,
  };
}

/** @param folder null: nothing is recorded */
async function handled(
  folder: string | null,
  name: string,
  readings: number,
): Promise<{ cpuUs: number; p99Us: number }> {
  const { plan } = scene(FOLLOWERS, 'frames');
  const starts = plan.followers.map((_, board) => ({ poseRad: null, unasked: true, awake: true, board }));
  const drive = makeDrive(plan, starts, 0);
  const source = eventSource(drive, null, 0);
  const clock = virtualClock(0);
  pipeline(
    source.events$,
    drive,
    () => {},
    (_, bug) => {
      throw bug;
    },
  );
  const disk = folder === null ? null : newTakeFile(join(folder, `${name}.arrows`));
  if (disk !== null && 'fault' in disk) throw new Error(disk.fault.detail);
  const take =
    disk === null ? null : recorder(drive, source.events$, clock, takeWriter(name, header(), null, disk.disk), 0);
  const times = new Float64Array(readings);
  const event = { kind: 'reading' as const, tUs: 0, counts: new Float64Array(JOINTS) };
  const before = process.cpuUsage();
  for (let i = 0; i < readings; i++) {
    const tUs = i * INTERVAL_US;
    event.tUs = tUs;
    for (let j = 0; j < JOINTS; j++) event.counts[j] = Math.round(2000 + 800 * Math.sin(i / 300 + j));
    const begun = performance.now();
    clock.runTo(tUs);
    source.push(event);
    times[i] = 1e3 * (performance.now() - begun);
    if (i % TURN === 0) await new Promise((resume) => setImmediate(resume));
  }
  const { user, system } = process.cpuUsage(before);
  const fault = (await take?.end()) ?? null;
  if (fault !== null) throw new Error(fault.detail);
  times.sort();
  return { cpuUs: user + system, p99Us: times[Math.floor(0.99 * readings)] as number };
}

function readingRates(folder: string, rows: number): Pick<TakeFigures, 'rows' | 'megabytes' | 'rates'> {
  const file = join(folder, 'hour.arrows');
  const hour = wholeFile(file);
  const writer = takeWriter('hour', header(), null, offlineDisk(hour));
  for (let i = 0; i < rows; i++) {
    const { row } = writer;
    row.tUs = i * 10_000;
    for (let j = 0; j < JOINTS; j++) {
      row.counts[j] = Math.round(2000 + 800 * Math.sin(i / 300 + j));
      row.poseRad[j] = Math.sin(i / 300 + j);
    }
    for (const arm of row.followers) {
      // Followers at 50 Hz: every other row has a command, the others stand as they were.
      arm.commanded = i % 2;
      arm.state = 3;
      if (i % 2 === 0) continue;
      for (let j = 0; j < JOINTS; j++) {
        arm.angleRad[j] = 0.7 * Math.sin(i / 300 + j);
        arm.targetRad[j] = 0.71 * Math.sin(i / 300 + j);
        arm.speedRadS[j] = 0.2 * Math.cos(i / 300 + j);
      }
    }
    writer.append();
    if (i % 25 === 24) writer.flush();
  }
  writer.finish();
  hour.keep();

  const megabytes = readFileSync(file).length / 1e6;
  const rate = (work: () => void): number => {
    const times = [0, 1, 2].map(() => {
      const begun = performance.now();
      work();
      return (performance.now() - begun) / 1e3;
    });
    return rows / (times.toSorted((a, b) => a - b)[1] as number);
  };
  const copy = rate(() => plainCopy(file, join(folder, 'copy.arrows')));
  const open = rate(() => opened(file).close());
  const show = rate(() => whole(file, (take) => summarize(take)));
  const csv = rate(() => exported(file, join(folder, 'out.csv'), 'csv'));
  const parquet = rate(() => exported(file, join(folder, 'out.parquet'), 'parquet'));
  const of = (what: string, rowsPerS: number): TakeFigures['rates'][number] => ({
    what,
    rowsPerS,
    overCopy: copy / rowsPerS,
  });
  const rates = [
    of('a plain Arrow copy', copy),
    of('open', open),
    of('show', show),
    of('export to CSV', csv),
    of('export to Parquet', parquet),
  ];
  return { rows, megabytes, rates };
}

/** Every batch decoded by Arrow and encoded by Arrow again. */
function plainCopy(from: string, to: string): void {
  const writer = new RecordBatchStreamWriter();
  const out = openSync(to, 'w');
  for (const batch of RecordBatchReader.from(readFileSync(from))) writer.write(batch);
  writer.finish();
  writeSync(out, writer.toUint8Array(true));
  closeSync(out);
}

function opened(file: string): Take {
  const take = openTake(file);
  if ('code' in take) throw new Error(take.detail);
  return take;
}

function whole(file: string, work: (take: Take) => Generator<number>): void {
  const take = opened(file);
  const steps = work(take);
  while (steps.next().done !== true);
  take.close();
}

function exported(file: string, to: string, format: 'csv' | 'parquet'): void {
  const out = openSync(to, 'w');
  whole(
    file,
    (take) =>
      exportTakes(
        [take],
        { format, columns: [], rateHz: null },
        (bytes) => void writeSync(out, bytes),
      ) as Generator<number>,
  );
  closeSync(out);
}

export function takeReport({ recordingShare, addedP99Us, rows, megabytes, rates }: TakeFigures): string {
  return [
    '',
    `Recording 8 joints and ${FOLLOWERS} followers at 1 kHz: ${(100 * recordingShare).toFixed(2)} % of a core (asked: under 5 %),`,
    `  p99 of a reading's handling ${addedP99Us.toFixed(0)} us more (asked: under 1,000)`,
    `A take of ${rows} rows, ${megabytes.toFixed(0)} MB, rows a second and times a plain Arrow copy:`,
    ...rates.map(
      ({ what, rowsPerS, overCopy }) =>
        `  ${what.padEnd(20)}${rowsPerS.toFixed(0).padStart(10)}   ${overCopy.toFixed(2)}`,
    ),
  ].join('\n');
}
