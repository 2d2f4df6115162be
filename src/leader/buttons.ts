import type { ButtonSpec } from './spec.ts';

/** Pressed and released by thresholds with hysteresis; what stops an arm acts on one reading, what moves it needs two. */
export interface Buttons {
  /** 1 while pressed. */
  readonly down: Uint8Array;
  /** 1: pressed by the last reading, -1: released by it, 0: unchanged. */
  readonly edge: Int8Array;
  /** @param counts one value a button, NaN when it did not come */
  push(counts: Float64Array): void;
}

/** A button is let go this far past its threshold, as a share of the converter's span. */
const HYSTERESIS_SHARE = 0.02;
const READINGS_TO_MOVE = 2;

export function buttons(specs: readonly ButtonSpec[], countsSpan: number): Buttons {
  const n = specs.length;
  const down = new Uint8Array(n);
  const edge = new Int8Array(n);
  const differs = new Uint8Array(n);
  const hysteresis = HYSTERESIS_SHARE * countsSpan;
  return {
    down,
    edge,
    push(counts) {
      for (let b = 0; b < n; b++) {
        const spec = specs[b] as ButtonSpec;
        const value = counts[b] as number;
        const past = spec.pressed === 'below' ? spec.counts - value : value - spec.counts;
        // An enable button that is not heard is not held; any other keeps its state.
        const want = Number.isNaN(value)
          ? spec.does === 'enable'
            ? 0
            : down[b]
          : past > (down[b] ? -hysteresis : 0)
            ? 1
            : 0;
        edge[b] = 0;
        if (want === down[b]) {
          differs[b] = 0;
          continue;
        }
        differs[b] = (differs[b] as number) + 1;
        const halts =
          spec.does === 'enable' ? want === 0 : want === 1 && (spec.does === 'stop' || spec.does === 'hold');
        if (!halts && (differs[b] as number) < READINGS_TO_MOVE) continue;
        differs[b] = 0;
        down[b] = want as number;
        edge[b] = want === 1 ? 1 : -1;
      }
    },
  };
}
