import { PerformanceObserver, type PerformanceEntry } from 'node:perf_hooks';
import { PERIOD_US, START_US } from './scene.ts';
import { type BytesOutcome, median, quantile, type Task, type TimeOutcome } from './task.ts';
import type { Way } from './way.ts';

/** Readings timed together: the clock is read once for all of them. */
const BATCH = 50;
/** Share of the readings that are timed one by one. */
const SINGLES = 0.5;
/** Readings whose allocations are estimated first, so that the measured ones fit the young generation. */
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
  const singles = task.measure === 'paced' ? task.readings : Math.round(task.readings * SINGLES);
  const batches = Math.floor((task.readings - singles) / BATCH);
  const batchUs = new Float64Array(batches);
  const singleUs = new Float64Array(singles);
  const pauses = watchGc();
  feed.push(task.warmUp);
  // Compilations that are waiting for the main thread are taken over now, not in the midst of the measured ones.
  await turn();
  const before = way.commands();
  const startMs = performance.now();
  for (let b = 0; b < batches; b++) {
    const fromMs = performance.now();
    feed.push(BATCH);
    batchUs[b] = ((performance.now() - fromMs) * 1_000) / BATCH;
  }
  const sleeper = task.measure === 'paced' ? metronome() : null;
  for (let k = 0; k < singles; k++) {
    sleeper?.();
    const fromMs = performance.now();
    feed.push(1);
    singleUs[k] = (performance.now() - fromMs) * 1_000;
  }
  const endMs = performance.now();
  const commands = (way.commands() - before) / (batches * BATCH + singles);
  singleUs.sort();
  return {
    medianUs: batches > 0 ? median([...batchUs]) : quantile(singleUs, 0.5),
    p99Us: quantile(singleUs, 0.99),
    worstUs: quantile(singleUs, 1),
    gc: summary(await pauses(), startMs, endMs),
    commands,
  };
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
  const pauses = watchGc();
  feed.push(task.warmUp);
  await turn();
  const probe = allocated(feed, PROBE);
  const readings = Math.min(task.readings, Math.max(PROBE, Math.floor(YOUNG_BYTES / Math.max(probe, 1))));
  gc();
  const before = way.commands();
  const startMs = performance.now();
  const bytes = allocated(feed, readings);
  const endMs = performance.now();
  const collected = summary(await pauses(), startMs, endMs).pauses;
  if (collected > 0) throw new Error('the collector ran while allocations were counted');
  return { bytes, commands: (way.commands() - before) / readings };
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
