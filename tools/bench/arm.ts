import { type ArmKernel, armKernels } from './arm-kernels.ts';
import { median, quantile } from './task.ts';

/** What one kernel took, in microseconds a call. */
export interface ArmFigure {
  readonly name: string;
  readonly medianUs: number;
  readonly p99Us: number;
  /** Paired with the first kernel's batches of the same round. */
  readonly ratio: number;
  /** Allocated a call; a share of a byte is the meter's own. */
  readonly bytes: number;
  readonly mostUs: number | null;
  readonly mostP99Us: number | null;
}

export interface ArmSize {
  readonly rounds: number;
  /** Calls timed together in a round, and calls timed one by one. */
  readonly batch: number;
  readonly singles: number;
}

export const ARM_SIZES = {
  whole: { rounds: 60, batch: 2_000, singles: 400 },
  tiny: { rounds: 3, batch: 50, singles: 20 },
} as const satisfies Record<string, ArmSize>;

/** Kernels take turns, so that what slows the machine down slows them all. */
export function armFigures({ rounds, batch, singles }: ArmSize): readonly ArmFigure[] {
  const kernels = armKernels().map((kernel) => ({ kernel, next: 0, batches: [] as number[], singles: [] as number[] }));
  type Timed = (typeof kernels)[number];
  const push = (timed: Timed, calls: number): number => {
    const from = performance.now();
    for (let k = 0; k < calls; k++) timed.kernel.run(timed.next++);
    return ((performance.now() - from) * 1_000) / calls;
  };
  for (const timed of kernels) push(timed, 2 * batch);
  for (let round = 0; round < rounds; round++) {
    for (const timed of kernels) {
      timed.batches.push(push(timed, batch));
      for (let k = 0; k < singles; k++) timed.singles.push(push(timed, 1));
    }
  }
  const first = kernels[0] as Timed;
  return kernels.map((timed) => ({
    name: timed.kernel.name,
    medianUs: median(timed.batches),
    p99Us: quantile(
      timed.singles.sort((a, b) => a - b),
      0.99,
    ),
    ratio: median(timed.batches.map((us, round) => us / (first.batches[round] as number))),
    bytes: allocated(timed.kernel, timed.next, batch),
    mostUs: timed.kernel.mostUs,
    mostP99Us: timed.kernel.mostP99Us,
  }));
}

/** Lowest of some tries: another thread's compilation may fall into one of them. */
const TRIES = 5;

function allocated(kernel: ArmKernel, from: number, calls: number): number {
  let least = Number.POSITIVE_INFINITY;
  for (let attempt = 0; attempt < TRIES; attempt++) {
    const before = process.memoryUsage().heapUsed;
    for (let k = 0; k < calls; k++) kernel.run(from + k);
    least = Math.min(least, (process.memoryUsage().heapUsed - before) / calls);
  }
  return least;
}

export function armReport(figures: readonly ArmFigure[]): string {
  const rows = figures.map(({ name, medianUs, p99Us, ratio, bytes, mostUs, mostP99Us }) =>
    [
      name.padEnd(38),
      medianUs.toFixed(2).padStart(9),
      (mostUs === null ? '' : `of ${mostUs.toFixed(0)}`).padStart(8),
      p99Us.toFixed(1).padStart(9),
      (mostP99Us === null ? '' : `of ${mostP99Us.toFixed(0)}`).padStart(8),
      ratio.toFixed(1).padStart(7),
      bytes.toFixed(1).padStart(8),
    ].join(' '),
  );
  const head = ['arm kernels, microseconds a call'.padEnd(38), 'median', '', 'p99', '', 'ratio', 'bytes'];
  const widths = [38, 9, 8, 9, 8, 7, 8];
  return [head.map((text, k) => (k === 0 ? text : text.padStart(widths[k] as number))).join(' '), ...rows].join('\n');
}
