/**
 * Running median of each input: kills converter spikes shorter than half the window, at the price of
 * (window - 1) / 2 readings of delay, and leaves ramps and steps unrounded.
 */
export interface Despike {
  /** Puts `value` into input `i`'s window and writes the window's median to output[i]. */
  push(i: number, input: Float64Array, output: Float64Array): void;
}

/** @param windows readings in each input's window: odd, 1 is off */
export function despike(windows: readonly number[]): Despike {
  const widest = Math.max(1, ...windows);
  const ring = new Float64Array(windows.length * widest);
  const filled = new Uint8Array(windows.length);
  const next = new Uint8Array(windows.length);
  const sorted = new Float64Array(widest);
  return {
    push(i, input, output) {
      const window = windows[i] as number;
      const base = i * widest;
      const slot = next[i] as number;
      ring[base + slot] = input[i] as number;
      next[i] = slot + 1 === window ? 0 : slot + 1;
      const count = Math.min((filled[i] as number) + 1, window);
      filled[i] = count;
      for (let k = 0; k < count; k++) {
        const value = ring[base + k] as number;
        let place = k;
        while (place > 0 && (sorted[place - 1] as number) > value) {
          sorted[place] = sorted[place - 1] as number;
          place--;
        }
        sorted[place] = value;
      }
      // Before the window is full an even count has two middles: the lower one, a value that was really read.
      output[i] = sorted[(count - 1) >> 1] as number;
    },
  };
}
