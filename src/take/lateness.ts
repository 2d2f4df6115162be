/** How late things were, in a histogram of fixed size. */
export interface Lateness {
  add(us: number): void;
  readonly count: number;
  readonly worstUs: number;
  /** The lateness that this share of them did not pass, to within a twentieth. */
  quantileUs(share: number): number;
}

/** Each bin is this much wider than the one before. */
const STEP = 1.05;
/** From a microsecond to about a quarter of an hour. */
const BINS = 424;

export function lateness(): Lateness {
  const bins = new Uint32Array(BINS);
  const self = {
    count: 0,
    worstUs: 0,
    add(us: number): void {
      const bin = us <= 1 ? 0 : Math.min(BINS - 1, Math.ceil(Math.log(us) / Math.log(STEP)));
      bins[bin] = (bins[bin] as number) + 1;
      self.count++;
      if (us > self.worstUs) self.worstUs = us;
    },
    quantileUs(share: number): number {
      const wanted = Math.ceil(share * self.count);
      let seen = 0;
      for (let bin = 0; bin < BINS; bin++) {
        seen += bins[bin] as number;
        if (seen >= wanted) return Math.min(self.worstUs, STEP ** bin);
      }
      return self.worstUs;
    },
  };
  return self;
}
