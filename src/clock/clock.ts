/**
 * The one clock of the project: monotonic integer microseconds and wake-ups at an instant.
 * Nothing else reads time or starts timers, so every room runs unchanged on `virtualClock`.
 */
export interface Clock {
  /** Now, in integer microseconds since an arbitrary origin; never goes back. */
  nowUs(): number;
  /** Calls `wake` once, at `atUs` or a little later, never before and never from inside this call. Returns a canceller. */
  at(atUs: number, wake: () => void): Cancel;
}

/** Takes a wake-up back; harmless when it already fired. */
export type Cancel = () => void;

export const US_PER_S = 1_000_000;
export const US_PER_MS = 1_000;

/** setTimeout takes at most 2^31 - 1 ms; a later instant is reached in several hops. */
const HOP_MS_MAX = 2 ** 31 - 1;

/** The machine's monotonic clock with Node's timers. */
export function realClock(): Clock {
  const nowUs = (): number => Math.floor(performance.now() * US_PER_MS);
  return {
    nowUs,
    at(atUs, wake) {
      let timer: NodeJS.Timeout;
      const hop = (): void => {
        const leftMs = Math.ceil((atUs - nowUs()) / US_PER_MS);
        timer = setTimeout(leftMs > HOP_MS_MAX ? hop : fire, Math.min(Math.max(leftMs, 0), HOP_MS_MAX));
      };
      // Timers round down to whole milliseconds: one that came early is sent back to sleep.
      const fire = (): void => (nowUs() < atUs ? hop() : wake());
      hop();
      return () => clearTimeout(timer);
    },
  };
}
