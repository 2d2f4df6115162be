import { describe, expect, it } from 'vitest';
import { analyseSweep } from '../../src/fit/sweep.ts';
import { random } from '../../src/sim/random.ts';

/** A sweep in counts: moves at some counts a reading, and dwells; noise as planted. */
function hand(noise: number, seed = 1) {
  const chance = random(seed, 3);
  const gaussian = (): number =>
    Math.sqrt(-2 * Math.log(1 - chance.uniform())) * Math.cos(2 * Math.PI * chance.uniform());
  const counts: number[] = [];
  let at = Number.NaN;
  const read = (): void => void counts.push(Math.round(at + noise * gaussian()));
  const self = {
    counts,
    stand(where: number, readings = 100) {
      at = where;
      for (let i = 0; i < readings; i++) read();
      return self;
    },
    go(to: number, perReading = 2) {
      const steps = Math.ceil(Math.abs(to - at) / perReading);
      const from = at;
      for (let i = 1; i <= steps; i++) {
        at = from + ((to - from) * i) / steps;
        read();
      }
      return self;
    },
  };
  return self;
}

const RANGE = [0, 1023] as const;
const twice = (noise: number) =>
  hand(noise).stand(100).go(900).stand(900).go(100).stand(100).go(900).stand(900).go(100).stand(100);

describe('A sweep', () => {
  it('gives the span, the noise and the bits of a sound pot, and finds nothing wrong', () => {
    const found = analyseSweep(twice(1).counts, RANGE, null);
    expect(found.span[0]).toBeCloseTo(100, 0);
    expect(found.span[1]).toBeCloseTo(900, 0);
    expect(found.endsConfirmed).toBe(true);
    // Root of 1 and 1/12.
    expect(found.noiseCounts).toBeCloseTo(1.04, 1);
    // log2(800 / (1.04 sqrt 12)) = 7.8, by hand.
    expect(found.effectiveBits).toBeCloseTo(7.8, 1);
    expect(found).toMatchObject({ deadSpots: [], gaps: [], spikes: 0, wraps: false, hysteresis: null });
    expect(found.visited).toBe(1);
  });

  it('ignores spikes, and counts them', () => {
    const { counts } = twice(1);
    counts[220] = 1023;
    counts[700] = 0;
    const found = analyseSweep(counts, RANGE, null);
    expect(found.spikes).toBe(2);
    expect(found.deadSpots).toEqual([]);
    expect(found.span[1]).toBeLessThan(902);
  });

  it('finds a dead spot by the counts before and after it, once for all sweeps', () => {
    const { counts } = twice(0.5);
    const lost = counts.map((count) => (count > 400 && count < 430 ? 0 : count));
    const found = analyseSweep(lost, RANGE, null);
    expect(found.deadSpots).toHaveLength(1);
    const [from, to] = found.deadSpots[0] ?? [0, 0];
    expect(Math.abs(from - 400)).toBeLessThan(4);
    expect(Math.abs(to - 430)).toBeLessThan(4);
    expect(found.wraps).toBe(false);
  });

  it('finds a gap: counts that are passed over on every sweep', () => {
    const { counts } = twice(0.5);
    const torn = counts.map((count) => (count > 500 ? count + 25 : count));
    expect(analyseSweep(torn, RANGE, null).gaps).toEqual([[expect.closeTo(500, -1), expect.closeTo(526, -1)]]);
  });

  it('suspects a pot that runs over its end and goes on at the other', () => {
    const { counts } = hand(0.5).stand(600).go(1400).stand(1400).go(600).stand(600);
    const wrapped = counts.map((count) => count % 1024);
    expect(analyseSweep(wrapped, RANGE, null).wraps).toBe(true);
  });

  it('says that ends are not confirmed when they were stood at once', () => {
    const { counts } = hand(0.5).stand(100).go(900).stand(900).go(500);
    expect(analyseSweep(counts, RANGE, null).endsConfirmed).toBe(false);
  });

  const marked = (play: number, wobble: readonly number[]) => {
    const [a = 0, b = 0, c = 0, d = 0] = wobble;
    return hand(0.5)
      .stand(100 + a)
      .go(500 - play / 2 + a)
      .stand(500 - play / 2 + a)
      .go(900)
      .stand(900 + b)
      .go(500 + play / 2 + b)
      .stand(500 + play / 2 + b)
      .go(100)
      .stand(100 + c)
      .go(500 - play / 2 + c)
      .stand(500 - play / 2 + c)
      .go(900)
      .stand(900 + d)
      .go(500 + play / 2 + d)
      .stand(500 + play / 2 + d)
      .go(100)
      .stand(100);
  };

  it('tells hysteresis from the hand’s wobble: a play of twelve counts under a wobble of one', () => {
    const { hysteresis } = analyseSweep(marked(12, [0.7, -0.8, -0.6, 0.9]).counts, RANGE, null);
    expect(hysteresis?.counts).toBeCloseTo(-12, -0.5);
    expect(hysteresis?.seen).toBe(true);
  });

  it('takes the hand’s wobble for no hysteresis', () => {
    const { hysteresis } = analyseSweep(marked(0, [4, -5, -4, 5]).counts, RANGE, null);
    expect(hysteresis?.seen).toBe(false);
    expect(hysteresis?.wobbleCounts).toBeGreaterThan(2);
  });
});
