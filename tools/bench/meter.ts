import { PerformanceObserver, type PerformanceEntry } from 'node:perf_hooks';
import { PERIOD_US, START_US } from './scene.ts';
import { type BytesOutcome, median, quantile, type Task, type TimeOutcome } from './task.ts';
import type { Way } from './way.ts';

/** Readings timed together, at most: the clock is read once for all of them. */
const BATCH_MAX = 50;
/** No batch takes much longer, so that most fit between two interruptions of a busy machine. */
const BATCH_US = 250;
/** The warm-up comes in portions, with a pause for the compiler's thread after each. */
const PORTIONS = 10;
const COMPILER_MS = 10;
/** Share of the readings that are timed one by one. */
const SINGLES = 0.5;
/** Readings looked at first, to see how many fit a batch, or the young generation. */
const PROBE = 20;
/** Half of the semi-space the parent asks for. */
const YOUNG_BYTES = 32 * 2 ** 20;

/** Pushes reading after reading; stamps are a thousand microseconds apart. */
class Feed {
  readonly nowUs = new Float64Array([START_US]);
  next = 0;
  readonly way: Way;
  readonly chunks: readonly Uint8Array[];

  constructor(way: Way, chunks: readonly Uint8Array[]) {
    this.way = way;
    this.chunks = chunks;
  }

  push(readings: number): void {
    for (let k = 0; k < readings; k++) {
      this.nowUs[0] = (this.nowUs[0] as number) + PERIOD_US;
      this.way.push(this.chunks[this.next++] as Uint8Array, this.nowUs);
    }
  }
}

export async function measureTime(task: Task, way: Way, chunks: readonly Uint8Array[]): Promise<TimeOutcome> {
  const feed = new Feed(way, chunks);
  const pauses = watchGc();
  await warm(feed, task.warmUp);
  const singles = task.measure === 'paced' ? task.readings : Math.round(task.readings * SINGLES);
  const batch = batchFor(feed);
  const batchUs = new Float64Array(Math.floor((task.readings - singles) / batch));
  const singleUs = new Float64Array(singles);
  const before = way.commands();
  const first = feed.next;
  const startMs = performance.now();
  for (let b = 0; b < batchUs.length; b++) {
    const fromMs = performance.now();
    feed.push(batch);
    batchUs[b] = ((performance.now() - fromMs) * 1_000) / batch;
  }
  const sleeper = task.measure === 'paced' ? metronome() : null;
  for (let k = 0; k < singles; k++) {
    sleeper?.();
    const fromMs = performance.now();
    feed.push(1);
    singleUs[k] = (performance.now() - fromMs) * 1_000;
  }
  const endMs = performance.now();
  const commands = (way.commands() - before) / (feed.next - first);
  singleUs.sort();
  return {
    medianUs: batchUs.length > 0 ? median([...batchUs]) : quantile(singleUs, 0.5),
    p99Us: quantile(singleUs, 0.99),
    worstUs: quantile(singleUs, 1),
    gc: summary(await pauses(), startMs, endMs),
    commands,
  };
}

async function warm(feed: Feed, readings: number): Promise<void> {
  for (let portion = 0; portion < PORTIONS; portion++) {
    feed.push(Math.floor(readings / PORTIONS));
    await new Promise((done) => setTimeout(done, COMPILER_MS));
  }
}

function batchFor(feed: Feed): number {
  const fromMs = performance.now();
  feed.push(PROBE);
  const eachUs = ((performance.now() - fromMs) * 1_000) / PROBE;
  return Math.min(Math.max(Math.round(BATCH_US / eachUs), 1), BATCH_MAX);
}

/** Sleeps to the next millisecond of an even grid, as a leader's bytes would arrive: caches cool down meanwhile. */
function metronome(): () => void {
  const cell = new Int32Array(new SharedArrayBuffer(4));
  let dueMs = performance.now();
  return () => {
    dueMs = Math.max(dueMs + PERIOD_US / 1_000, performance.now() - 1);
    const leftMs = dueMs - performance.now();
    if (leftMs > 0) Atomics.wait(cell, 0, 0, leftMs);
  };
}

export async function measureBytes(task: Task, way: Way, chunks: readonly Uint8Array[]): Promise<BytesOutcome> {
  if (gc === undefined) throw new Error('start this child with --expose-gc');
  const feed = new Feed(way, chunks);
  await warm(feed, task.warmUp);
  gc();
  const probe = allocated(feed, PROBE);
  let readings = Math.min(task.readings - PROBE, Math.max(PROBE, Math.floor(YOUNG_BYTES / Math.max(probe, 1))));
  for (; readings > 0; readings = Math.floor(readings / 4)) {
    gc();
    const pauses = watchGc();
    const before = way.commands();
    const startMs = performance.now();
    const bytes = allocated(feed, readings);
    const endMs = performance.now();
    // Whatever was collected meanwhile is missing from the sum: once more, with less to do.
    if (summary(await pauses(), startMs, endMs).pauses > 0) continue;
    return { bytes, commands: (way.commands() - before) / readings };
  }
  throw new Error('the collector runs at every reading: its allocations cannot be counted');
}

function allocated(feed: Feed, readings: number): number {
  const before = process.memoryUsage().heapUsed;
  feed.push(readings);
  return (process.memoryUsage().heapUsed - before) / readings;
}

/** Starts watching the collector; the function it returns ends that and tells every pause. */
function watchGc(): () => Promise<readonly PerformanceEntry[]> {
  const entries: PerformanceEntry[] = [];
  const observer = new PerformanceObserver((list) => entries.push(...list.getEntries()));
  observer.observe({ entryTypes: ['gc'] });
  return async () => {
    // Pauses are told a turn of the loop after they were.
    await turn();
    await turn();
    observer.disconnect();
    return entries;
  };
}

function summary(entries: readonly PerformanceEntry[], startMs: number, endMs: number): TimeOutcome['gc'] {
  const inside = entries.filter((entry) => entry.startTime >= startMs && entry.startTime < endMs);
  const totalMs = inside.reduce((sum, entry) => sum + entry.duration, 0);
  return {
    pauses: inside.length,
    longestUs: Math.max(0, ...inside.map((entry) => entry.duration)) * 1_000,
    shareOfTime: totalMs / (endMs - startMs),
  };
}

function turn(): Promise<void> {
  return new Promise((done) => setImmediate(done));
}
