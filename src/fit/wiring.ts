/** What a leader's inputs did while one joint was moved and nothing else. */
export interface Wiring {
  /** The input that moved with the joint; null: none did. */
  readonly input: number | null;
  /** Others that moved along, and so share its wire or its supply. */
  readonly shared: readonly number[];
  /** Inputs that jump about whether something moves or not. */
  readonly noisy: readonly number[];
}

/** An input that changes by less of the converter's range has not been moved. */
const MOVED_SHARE = 0.03;
/** One that moves along by this much of what the joint's own does hangs on the same wire. */
const SHARED_SHARE = 0.2;
const SHARED_CORRELATION = 0.9;
/** Jumps from reading to reading that no hand makes, as a share of the range, and how many of a hundred may be larger. */
const NOISY_SHARE = 0.02;
const JUMPY_QUANTILE = 0.8;

/**
 * @param readings in order of time; each has one count an input, NaN where it had none
 * @param width of the converter's range, in counts
 */
export function wiringOf(readings: readonly ArrayLike<number>[], inputs: number, width: number): Wiring {
  const columns = Array.from({ length: inputs }, (_, i) =>
    readings.map((reading) => reading[i] as number).filter((count) => !Number.isNaN(count)),
  );
  const noisy = columns.flatMap((column, i) => (jumpiness(column) > NOISY_SHARE * width ? [i] : []));
  // Without the outermost readings, so that a spike is no motion.
  const spans = columns.map((column) => (column.length === 0 ? 0 : quantile(column, 0.98) - quantile(column, 0.02)));
  const steady = spans.map((span, i) => (noisy.includes(i) ? 0 : span));
  const most = Math.max(0, ...steady);
  const input = most < MOVED_SHARE * width ? null : steady.indexOf(most);
  const shared =
    input === null
      ? []
      : columns.flatMap((column, i) => {
          if (i === input || noisy.includes(i) || (steady[i] as number) < SHARED_SHARE * most) return [];
          return Math.abs(correlation(column, columns[input] as readonly number[])) > SHARED_CORRELATION ? [i] : [];
        });
  return { input, shared, noisy };
}

/** How far most readings are from the middle of their neighbours. A dead spot, passed now and then, is no such thing. */
function jumpiness(column: readonly number[]): number {
  const bends = column.slice(2).map((at, i) => Math.abs((at + (column[i] as number)) / 2 - (column[i + 1] as number)));
  return bends.length === 0 ? 0 : quantile(bends, JUMPY_QUANTILE);
}

function quantile(column: readonly number[], share: number): number {
  const sorted = column.toSorted((a, b) => a - b);
  return sorted[Math.round(share * (sorted.length - 1))] as number;
}

function correlation(a: readonly number[], b: readonly number[]): number {
  const n = Math.min(a.length, b.length);
  const mean = (of: readonly number[]): number => of.slice(0, n).reduce((sum, each) => sum + each, 0) / n;
  const [ma, mb] = [mean(a), mean(b)];
  let [ab, aa, bb] = [0, 0, 0];
  for (let i = 0; i < n; i++) {
    const [da, db] = [(a[i] as number) - ma, (b[i] as number) - mb];
    ab += da * db;
    aa += da * da;
    bb += db * db;
  }
  return aa === 0 || bb === 0 ? 0 : ab / Math.sqrt(aa * bb);
}
