/** Two series of vectors laid over each other in time. */
export interface Alignment {
  /** Sum of the distances along the path. */
  readonly cost: number;
  /** Pairs of places, in order: path[2k] in the first series, path[2k + 1] in the second. */
  readonly path: Int32Array;
}

/**
 * Dynamic time warping: the pairing of two series that begins and ends together, never goes back, and has the least sum
 * of distances. H. Sakoe, S. Chiba, "Dynamic programming algorithm optimization for spoken word recognition", IEEE Trans.
 * ASSP 26 (1978) 43-49, without slope weights, inside a band about the diagonal.
 * @param a rows of `width` numbers
 * @param band how far a pair may lie from the diagonal, as a share of the longer series; memory is bounded by it
 */
export function warp(a: Float64Array, b: Float64Array, width: number, band = 1): Alignment {
  const rows = a.length / width;
  const columns = b.length / width;
  const half = Math.max(Math.ceil(band * Math.max(rows, columns)), Math.ceil(columns / rows) + 1, 2);
  const span = Math.min(columns, 2 * half + 1);
  const from = (i: number): number => {
    const middle = rows === 1 ? 0 : Math.round((i * (columns - 1)) / (rows - 1));
    return Math.min(Math.max(0, middle - half), columns - span);
  };
  let before = new Float64Array(span).fill(Number.POSITIVE_INFINITY);
  let now = new Float64Array(span);
  const steps = new Uint8Array(rows * span);
  for (let i = 0; i < rows; i++) {
    const shift = i === 0 ? 0 : from(i) - from(i - 1);
    for (let k = 0; k < span; k++) {
      const j = from(i) + k;
      const up = i === 0 ? Number.POSITIVE_INFINITY : (before[k + shift] ?? Number.POSITIVE_INFINITY);
      const across = i === 0 ? Number.POSITIVE_INFINITY : (before[k + shift - 1] ?? Number.POSITIVE_INFINITY);
      const left = k === 0 ? Number.POSITIVE_INFINITY : (now[k - 1] as number);
      const least = i === 0 && j === 0 ? 0 : Math.min(across, up, left);
      steps[i * span + k] = least === across ? ACROSS : least === up ? UP : LEFT;
      now[k] = least + distance(a, i * width, b, j * width, width);
    }
    [before, now] = [now, before];
  }
  return { cost: before[columns - 1 - from(rows - 1)] as number, path: walk(steps, rows, columns, span, from) };
}

const ACROSS = 0;
const UP = 1;
const LEFT = 2;

function walk(steps: Uint8Array, rows: number, columns: number, span: number, from: (i: number) => number): Int32Array {
  const backwards: number[] = [];
  let i = rows - 1;
  let j = columns - 1;
  for (;;) {
    backwards.push(j, i);
    if (i === 0 && j === 0) return Int32Array.from(backwards.reverse());
    const step = i === 0 ? LEFT : steps[i * span + j - from(i)];
    if (step !== LEFT) i--;
    if (step !== UP) j--;
  }
}

function distance(a: Float64Array, i: number, b: Float64Array, j: number, width: number): number {
  let sum = 0;
  for (let k = 0; k < width; k++) sum += ((a[i + k] as number) - (b[j + k] as number)) ** 2;
  return Math.sqrt(sum);
}
