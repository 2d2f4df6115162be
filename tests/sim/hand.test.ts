import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { type HandInput, type HandOptions, minimumJerk, simulatedHand } from '../../src/sim/hand.ts';

const DEG = Math.PI / 180;
/** A 12-bit converter on joints of 240 degrees. */
const JOINT: HandInput = {
  kind: 'joint',
  travelMin: 200,
  travelMax: 3900,
  restCounts: 2000,
  countsPerRad: 3700 / (240 * DEG),
};
const BUTTON: HandInput = { kind: 'button', restCounts: 4000 };

function hand(changes: Partial<HandOptions> = {}): HandOptions {
  return { seed: 7, countsMin: 0, countsMax: 4095, inputs: [JOINT, JOINT, JOINT, BUTTON], ...changes };
}

function read(options: HandOptions, fromUs: number, untilUs: number, everyUs: number, input: number): number[] {
  const simulated = simulatedHand(options);
  const out = new Float64Array(options.inputs.length);
  const counts: number[] = [];
  for (let tUs = fromUs; tUs < untilUs; tUs += everyUs) {
    simulated.countsAt(tUs, out);
    counts.push(out[input] as number);
  }
  return counts;
}

/** Reaches alone, on a scale so fine that whole counts hide nothing. */
const FINE: HandOptions = {
  seed: 7,
  countsMin: 0,
  countsMax: 2 ** 40,
  inputs: [0, 1, 2].map(() => ({
    kind: 'joint',
    travelMin: 0,
    travelMax: 2 ** 40,
    restCounts: 2 ** 39,
    countsPerRad: 2 ** 38,
  })),
  tremorRad: 0,
  noiseCounts: 0,
};

interface Reach {
  seconds: number;
  way: number;
  peakPerS: number;
  startUs: number;
}

/** Reaches of one input, found from its speed alone. */
function reachesOf(input: number, seconds: number): Reach[] {
  const everyUs = 1_000;
  const counts = read(FINE, 0, seconds * 1e6, everyUs, input);
  const reaches: Reach[] = [];
  let start = -1;
  let peak = 0;
  for (let i = 1; i < counts.length; i++) {
    const step = Math.abs((counts[i] as number) - (counts[i - 1] as number));
    if (step > 0 && start < 0) start = i - 1;
    if (start < 0) continue;
    peak = Math.max(peak, step);
    if (step === 0) {
      const way = Math.abs((counts[i] as number) - (counts[start] as number));
      reaches.push({ seconds: (i - 1 - start) / 1000, way, peakPerS: peak * 1000, startUs: start * everyUs });
      start = -1;
      peak = 0;
    }
  }
  return reaches;
}

describe('a minimum-jerk reach', () => {
  it('goes half its way in half its time and stands still at both ends', () => {
    // Flash & Hogan, J. Neurosci. 5 (1985) 1688: s = 10u^3 - 15u^4 + 6u^5; by hand at 1/4: 10/64 - 15/256 + 6/1024.
    expect(minimumJerk(0)).toBe(0);
    expect(minimumJerk(0.25)).toBeCloseTo(0.103515625, 12);
    expect(minimumJerk(0.5)).toBeCloseTo(0.5, 12);
    expect(minimumJerk(1)).toBe(1);
  });

  it('peaks at 1.875 times its mean speed', () => {
    // Flash & Hogan 1985: peak of 30u^2 - 60u^3 + 30u^4 at u = 1/2 is 15/8.
    const reaches = reachesOf(0, 60);
    expect(reaches.length).toBeGreaterThan(10);
    for (const { seconds, way, peakPerS } of reaches) {
      // Start and end are found to a millisecond each, of 600 and more.
      expect(peakPerS / (way / seconds)).toBeGreaterThan(1.875 * (1 - 0.005));
      expect(peakPerS / (way / seconds)).toBeLessThan(1.875 * (1 + 0.005));
    }
  });
});

describe('the simulated hand', () => {
  it('lies still for a second, then reaches for 0.6 to 2 s at a time', () => {
    const still = read(FINE, 0, 1_000_000, 1_000, 0);
    expect(new Set(still)).toEqual(new Set([2 ** 39]));
    const reaches = reachesOf(0, 120);
    for (const { seconds } of reaches) {
      expect(seconds).toBeGreaterThan(0.6 - 0.003);
      expect(seconds).toBeLessThan(2 + 0.003);
    }
    expect(Math.max(...reaches.map((reach) => reach.seconds))).toBeGreaterThan(1.5);
  });

  it('has moved every joint within 4 s, so that a watcher sees that it lives', () => {
    fc.assert(
      fc.property(fc.integer(), fc.nat(2), (seed, input) => {
        const counts = read(hand({ seed }), 0, 4_000_000, 50_000, input);
        // A tenth of the travel of 3,700 counts is reached at least, less tremor and noise.
        expect(Math.max(...counts) - Math.min(...counts)).toBeGreaterThan(350);
      }),
    );
  });

  it('moves joints together: they start at common instants', () => {
    const starts = new Set(reachesOf(0, 60).map((reach) => Math.round(reach.startUs / 5_000)));
    const others = reachesOf(1, 60).map((reach) => Math.round(reach.startUs / 5_000));
    const shared = others.filter((start) => starts.has(start) || starts.has(start - 1) || starts.has(start + 1));
    expect(shared.length / others.length).toBeGreaterThan(0.5);
  });

  it('keeps away from the ends of the travel once it has left its rest', () => {
    const span = 2 ** 40;
    const counts = read(FINE, 0, 300_000_000, 10_000, 2);
    expect(Math.min(...counts)).toBeGreaterThanOrEqual(0.15 * span - 1);
    expect(Math.max(...counts)).toBeLessThanOrEqual(0.85 * span + 1);
    expect(Math.max(...counts) - Math.min(...counts)).toBeGreaterThan(0.4 * span);
  });

  it('reads the same for the same seed, and otherwise for another', () => {
    const a = read(hand(), 0, 20_000_000, 5_000, 1);
    expect(read(hand(), 0, 20_000_000, 5_000, 1)).toEqual(a);
    expect(read(hand({ seed: 8 }), 0, 20_000_000, 5_000, 1)).not.toEqual(a);
  });

  it('does not depend on how often, or in which order, it is read', () => {
    const fast = read(hand(), 0, 10_000_000, 1_000, 0);
    const slow = read(hand(), 0, 10_000_000, 20_000, 0);
    expect(slow).toEqual(fast.filter((_, i) => i % 20 === 0));
    const simulated = simulatedHand(hand());
    const out = new Float64Array(4);
    simulated.countsAt(9_980_000, out);
    expect(out[0]).toBe(slow[499]);
    simulated.countsAt(2_000_000, out);
    expect(out[0]).toBe(slow[100]);
  });

  it('reads whole counts inside the converter, whatever the options and the instant', () => {
    const joint = fc.record({
      kind: fc.constant('joint' as const),
      travelMin: fc.integer({ min: -50, max: 400 }),
      travelMax: fc.integer({ min: 500, max: 1200 }),
      restCounts: fc.integer({ min: 0, max: 1023 }),
      countsPerRad: fc.double({ min: -500, max: 500, noNaN: true }),
    });
    fc.assert(
      fc.property(fc.integer(), fc.array(joint, { maxLength: 8 }), fc.nat(60_000_000), (seed, inputs, tUs) => {
        const out = new Float64Array(inputs.length);
        simulatedHand({ seed, countsMin: 0, countsMax: 1023, inputs }).countsAt(tUs, out);
        for (const counts of out) {
          expect(Number.isInteger(counts)).toBe(true);
          expect(counts).toBeGreaterThanOrEqual(0);
          expect(counts).toBeLessThanOrEqual(1023);
        }
      }),
    );
  });

  it('leaves buttons unpressed', () => {
    const counts = read(hand(), 0, 30_000_000, 10_000, 3);
    // Five deviations of the converter's 0.7 counts, and half a count of rounding.
    expect(Math.max(...counts.map((each) => Math.abs(each - 4000)))).toBeLessThanOrEqual(4);
  });
});

describe('the tremor', () => {
  /** Held in one place, so that only tremor moves it. */
  const held = (changes: Partial<HandOptions>): HandOptions => ({
    ...FINE,
    inputs: [{ kind: 'joint', travelMin: 2 ** 39, travelMax: 2 ** 39, restCounts: 2 ** 39, countsPerRad: 2 ** 30 }],
    tremorRad: 0.1 * DEG,
    ...changes,
  });
  const everyUs = 5_000;
  const n = 2_000;
  const angles = (options: HandOptions): number[] =>
    read(options, 2_000_000, 2_000_000 + n * everyUs, everyUs, 0).map((counts) => (counts - 2 ** 39) / 2 ** 30);

  /** Power at each multiple of 0.1 Hz (n readings of 5 ms), by a plain Fourier sum. */
  const powerFrom = (values: readonly number[], lowHz: number, highHz: number): number => {
    let power = 0;
    for (let k = Math.round(lowHz * 10); k <= Math.round(highHz * 10); k++) {
      let re = 0;
      let im = 0;
      for (let i = 0; i < n; i++) {
        re += (values[i] as number) * Math.cos((2 * Math.PI * k * i) / n);
        im += (values[i] as number) * Math.sin((2 * Math.PI * k * i) / n);
      }
      power += re * re + im * im;
    }
    return power;
  };

  it('lies in the band of physiological tremor, 8 to 12 Hz', () => {
    // Band: Elble & Randall, J. Neurophysiol. 39 (1976) 370 (from memory). A tone between two multiples of 0.1 Hz
    // leaks a little beside the band.
    for (const seed of [1, 2, 3]) {
      const values = angles(held({ seed }));
      expect(powerFrom(values, 7.5, 12.5) / powerFrom(values, 0, 40)).toBeGreaterThan(0.98);
    }
  });

  it('has the size asked for', () => {
    const values = angles(held({}));
    const rms = Math.sqrt(values.reduce((sum, value) => sum + value * value, 0) / n);
    // Tones closer than 0.1 Hz do not average out in 10 s: a loose bound.
    expect(rms / (0.1 * DEG)).toBeGreaterThan(0.6);
    expect(rms / (0.1 * DEG)).toBeLessThan(1.4);
    expect(Math.max(...values.map(Math.abs))).toBeLessThan(0.1 * DEG * Math.sqrt(12));
  });

  it('is absent while the leader lies untouched', () => {
    const untouched = read(held({}), 0, 1_000_000, everyUs, 0);
    expect(new Set(untouched)).toEqual(new Set([2 ** 39]));
  });
});

describe('the converter', () => {
  it('adds noise of the deviation asked for', () => {
    const held: HandInput = { kind: 'button', restCounts: 2000 };
    for (const noiseCounts of [0.5, 1, 3]) {
      const counts = read(hand({ inputs: [held], noiseCounts }), 0, 20_000_000, 5_000, 0);
      const square = counts.reduce((sum, each) => sum + (each - 2000) ** 2, 0) / counts.length;
      // Rounding to whole counts adds 1/12 (Sheppard's correction, any statistics textbook).
      expect(square / (noiseCounts ** 2 + 1 / 12)).toBeGreaterThan(0.85);
      expect(square / (noiseCounts ** 2 + 1 / 12)).toBeLessThan(1.15);
    }
  });
});
