import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { backlashOf, deadbandOf } from '../../src/fit/deadband.ts';
import { driftOf } from '../../src/fit/drift.ts';
import { hornCentring } from '../../src/fit/horn.ts';
import { leastDeviation } from '../../src/fit/linearity.ts';
import { matchPoses } from '../../src/fit/match.ts';
import { fitServo } from '../../src/fit/servo-fit.ts';
import { judgeHold } from '../../src/fit/stillness.ts';
import { suggest, varianceLeft } from '../../src/fit/suggest.ts';
import { wiringOf } from '../../src/fit/wiring.ts';
import { oneEuro } from '../../src/leader/one-euro.ts';
import { random } from '../../src/sim/random.ts';
import { plantedServo } from './workbench.ts';

const steps = (from: number, to: number, n: number): number[] =>
  Array.from({ length: n }, (_, i) => from + ((to - from) * i) / (n - 1));

describe('Independent linearity', () => {
  it('of three points is half of what the middle one is off the line of the others', () => {
    // (0, 0), (1, 1), (2, 1): the line 1/2 x is missed by 1/2 at the middle; halfway to it, by 1/4 everywhere.
    const found = leastDeviation([0, 1, 2], [0, 1, 1]);
    expect(found.deviation).toBeCloseTo(0.25, 12);
    expect(found.slope).toBeCloseTo(0.5, 12);
    expect(found.offset).toBeCloseTo(0.25, 12);
  });

  it('of a parabola over its span is an eighth of its bend: 1/8 for x squared over 0 to 1 (Chebyshev, by hand)', () => {
    const x = steps(0, 1, 1001);
    expect(
      leastDeviation(
        x,
        x.map((each) => each * each),
      ).deviation,
    ).toBeCloseTo(1 / 8, 6);
  });

  it('is at most the terminal-based and the zero-based one, and no line does better', () => {
    const points = fc.array(fc.tuple(fc.integer({ min: 0, max: 1000 }), fc.integer({ min: -500, max: 500 })), {
      minLength: 3,
      maxLength: 30,
    });
    fc.assert(
      fc.property(points, fc.double({ min: -2, max: 2, noNaN: true }), (pairs, tilt) => {
        const x = pairs.map(([each]) => each);
        const y = pairs.map(([, each]) => each);
        fc.pre(Math.max(...x) > Math.min(...x));
        const found = leastDeviation(x, y);
        const off = (slope: number, offset: number): number =>
          Math.max(...x.map((each, i) => Math.abs((y[i] as number) - slope * each - offset)));
        expect(off(found.slope, found.offset)).toBeCloseTo(found.deviation, 6);
        const least = x.indexOf(Math.min(...x));
        const most = x.indexOf(Math.max(...x));
        const terminal = ((y[most] as number) - (y[least] as number)) / ((x[most] as number) - (x[least] as number));
        const others = [terminal, found.slope + tilt, found.slope * 0.99];
        for (const slope of others) {
          const offset = (y[least] as number) - slope * (x[least] as number);
          expect(found.deviation).toBeLessThanOrEqual(off(slope, offset) + 1e-9);
        }
      }),
    );
  });
});

describe('A hold', () => {
  const chance = random(4, 1);
  const around = (mean: number, noise: number, n = 50, drift = 0): number[] =>
    Array.from({ length: n }, (_, i) => Math.round(mean + (drift * i) / n + 3.4 * noise * (chance.uniform() - 0.5)));

  it('that is still is averaged', () => {
    const found = judgeHold(around(500.4, 1), 1);
    if (!found.still) throw new Error(found.why);
    expect(found.mean).toBeCloseTo(500.4, 0);
  });

  it.each([
    ['moving', around(500, 1, 50, 20)],
    ['noisy', around(500, 30)],
    ['few', around(500, 1, 8)],
  ] as const)('is refused as %s', (why, counts) => {
    expect(judgeHold(counts, 1)).toMatchObject({ still: false, why });
  });
});

describe('Horn centring', () => {
  it.each([
    // 360 / 25 = 14.4 degrees a step.
    [10, 25, -1, -4.4],
    [-20, 25, 1, -5.6],
    [7, 25, 0, 7],
    [30, 24, -2, 0],
  ])('of a horn %d degrees past the middle on %d teeth', (off, teeth, turns, left) => {
    const found = hornCentring(off, teeth);
    expect(found.steps).toBe(turns);
    expect(found.leftDeg).toBeCloseTo(left, 9);
  });

  it('never leaves more than half a step', () => {
    const angle = fc.double({ min: -180, max: 180, noNaN: true });
    fc.assert(
      fc.property(angle, fc.integer({ min: 15, max: 30 }), (off, teeth) => {
        expect(Math.abs(hornCentring(off, teeth).leftDeg)).toBeLessThanOrEqual(180 / teeth + 1e-9);
      }),
    );
  });
});

describe('A servo measured both ways', () => {
  it('shows its true travel and what is lost as it turns back', () => {
    // 10 us a degree, 1.2 degrees of play in all, off by 2: rising pulses lag by 0.6, falling ones lead by it.
    const up = steps(700, 2300, 9).map((us) => ({ pulseUs: us, angleDeg: (us - 1500) / 10 + 2 - 0.6 }));
    const down = steps(2300, 700, 9).map((us) => ({ pulseUs: us, angleDeg: (us - 1500) / 10 + 2 + 0.6 }));
    const found = fitServo([...up, ...down.slice(1)], (us) => ((us - 1500) / 900) * 90, 0.1);
    if ('why' in found) throw new Error(found.why);
    expect(found.travelDeg).toBeCloseTo(160, 0);
    expect(found.nominalDeg).toBeCloseTo(160, 6);
    expect(found.lostMotionDeg?.is).toBeCloseTo(1.2, 6);
  });

  it('has no lost motion to tell when it was measured one way only', () => {
    const found = fitServo(
      steps(700, 2300, 9).map((us) => ({ pulseUs: us, angleDeg: -(us - 1500) / 11 })),
      (us) => us,
      0.1,
    );
    if ('why' in found) throw new Error(found.why);
    expect(found.lostMotionDeg).toBeNull();
    expect(found.map.slope.is).toBeCloseTo(-1 / 11, 9);
  });
});

describe('A deadband', () => {
  const steps = (...pairs: readonly (readonly [us: number, moved: 0 | 1])[]) =>
    pairs.map(([pulseUs, moved]) => ({ pulseUs, moved: moved === 1 }));

  it('is the smallest change that is answered onward from where it last moved', () => {
    // The first move only finds where it stands. Then 4 us and 3 us are too little, 5 us and 4 us enough: 4.5 and 3.5.
    const found = deadbandOf(steps([1500, 1], [1503, 1], [1507, 0], [1508, 1], [1511, 0], [1512, 1]));
    expect(found?.is).toBeCloseTo(4, 9);
    // Half a microsecond of step, and a t of 12.71 for two trials that are 1 apart: 12.71 * sqrt(1/2) / sqrt(2).
    expect(found?.error95).toBeCloseTo(Math.hypot(0.5, 12.706 * 0.5), 2);
  });

  it('is known to half a step from one trial', () => {
    expect(deadbandOf(steps([1500, 1], [1502, 1], [1504, 0], [1508, 1]))).toEqual({ is: 4, error95: 2 });
  });

  it('has nothing to do with the play that a turn takes out', () => {
    expect(deadbandOf(steps([1500, 1], [1503, 1], [1490, 0], [1488, 1]))).toBeNull();
    expect(deadbandOf(steps([1500, 1], [1503, 1], [1490, 0], [1488, 1], [1484, 0], [1483, 1]))).toEqual({
      is: 4.5,
      error95: 0.5,
    });
    // Forth, back a little and forth again: nobody knows where in its play it was.
    expect(deadbandOf(steps([1500, 1], [1503, 1], [1506, 0], [1502, 0], [1508, 1]))).toBeNull();
  });

  it('is not known from nothing', () => {
    expect(deadbandOf([])).toBeNull();
    expect(deadbandOf(steps([1500, 1], [1501, 0], [1502, 0]))).toBeNull();
  });

  it('of any servo is found to the microsecond it was stepped with, whatever its play', () => {
    const planted = fc.record({
      deadbandUs: fc.integer({ min: 0, max: 12 }),
      playUs: fc.double({ min: 0, max: 20, noNaN: true }),
      up: fc.boolean(),
    });
    fc.assert(
      fc.property(planted, ({ deadbandUs, playUs, up }) => {
        const horn = plantedServo('base', (us) => us, { deadbandUs, playUs });
        horn.feed(1500);
        const way = up ? 1 : -1;
        const found: { pulseUs: number; moved: boolean }[] = [];
        for (let us = 1500; us < 1600; us++) {
          const was = horn.standsDeg();
          horn.feed(1500 + way * (us - 1500));
          found.push({ pulseUs: horn.pulseUs(), moved: horn.standsDeg() !== was });
        }
        const { is = Number.NaN, error95 } = deadbandOf(found) ?? {};
        expect(Math.abs(is - (deadbandUs + 0.5))).toBeLessThan(1e-9);
        expect(error95).toBeCloseTo(0.5, 9);
      }),
    );
  });

  it('is taken from what is lost as a servo turns back, and the rest is backlash', () => {
    // 1.5 degrees are lost, 5 us of deadband are 0.5 degrees: 0.5 to 1.5 degrees are play, whatever it stopped short by.
    expect(backlashOf({ is: 1.5, error95: 0.375 }, 0.5)).toEqual({ is: 1, error95: 0.625 });
    expect(backlashOf({ is: 0.2, error95: null }, 0.4)).toEqual({ is: 0, error95: null });
  });
});

describe('A match', () => {
  it('gives gain, direction and offset back, with errors that hold the truth', () => {
    let [gains, offsets] = [0, 0];
    for (let seed = 1; seed <= 400; seed++) {
      const chance = random(seed, 2);
      const pairs = steps(-60, 60, 7).map((followerDeg) => ({
        followerDeg,
        leaderDeg: (followerDeg - 8) / -0.6 + chance.between(-2, 2),
      }));
      const found = matchPoses(pairs);
      if ('why' in found) continue;
      expect(found.direction).toBe('reversed');
      if (Math.abs(found.gain.is - 0.6) <= (found.gain.error95 ?? 0)) gains++;
      if (Math.abs(found.offsetDeg.is - 8) <= (found.offsetDeg.error95 ?? 0)) offsets++;
    }
    expect(gains).toBeGreaterThanOrEqual(360);
    expect(offsets).toBeGreaterThanOrEqual(360);
  });

  it('does not shrink the gain, as fitting the wrong way round would', () => {
    const gains = steps(1, 200, 200).map((seed) => {
      const chance = random(Math.round(seed), 5);
      const pairs = steps(-30, 30, 15).map((followerDeg) => ({
        followerDeg,
        leaderDeg: followerDeg + chance.between(-15, 15),
      }));
      const found = matchPoses(pairs);
      return 'why' in found ? Number.NaN : found.gain.is;
    });
    const sorted = gains.toSorted((a, b) => a - b);
    expect(sorted[100]).toBeCloseTo(1, 1);
  });
});

describe('Drift', () => {
  const map = steps(-100, 100, 9);
  const chance = random(9, 1);
  const scatter = map.map(() => chance.between(-0.8, 0.8));

  it('is not seen in scatter alone', () => {
    expect(
      driftOf(
        map,
        map.map((deg, i) => deg + (scatter[i] as number)),
        0.5,
      ).drifted,
    ).toBe(false);
  });

  it.each([
    ['a horn or pot that slipped by 3 degrees', 3, 0],
    ['a turn that is 4 % too long', 0, 4],
  ])('is seen as %s', (_, shift, percent) => {
    const found = driftOf(
      map,
      map.map((deg, i) => deg * (1 + percent / 100) + shift + (scatter[i] as number)),
      0.5,
    );
    expect(found.drifted).toBe(true);
    expect(found.shiftDeg).toBeCloseTo(shift, 0);
    expect(found.stretchPercent).toBeCloseTo(percent, 0);
  });

  it('is judged by the stated error where one point is all there is', () => {
    expect(driftOf([40], [41], 1.5).drifted).toBe(false);
    expect(driftOf([40], [42], 1.5).drifted).toBe(true);
  });
});

describe('A suggestion', () => {
  const RATE_HZ = 100;
  const noiseRad = 0.004;
  const feed = { gain: 0.5, leverM: 1, sharedBy: 1 };

  it('keeps the tip as still as wished: seen in the filter that a rig would run', () => {
    const found = suggest({ noiseRad, feeds: [feed] }, { jitterM: 0.0005, lagS: 1 }, RATE_HZ);
    expect(found.tipM[0]).toBeCloseTo(0.0005, 9);
    expect(found.deadbandRad).toEqual([0]);
    const filter = oneEuro([{ cutoffHz: found.cutoffHz as number, betaHzPerRadS: 0, slopeCutoffHz: 1 }]);
    const [value, out, now] = [new Float64Array(1), new Float64Array(1), new Float64Array(1)];
    const chance = random(3, 1);
    let squares = 0;
    for (let i = 0; i < 40_000; i++) {
      value[0] = noiseRad * Math.sqrt(-2 * Math.log(1 - chance.uniform())) * Math.cos(2 * Math.PI * chance.uniform());
      now[0] = i * 10_000;
      filter.push(0, now, value, out);
      if (i >= 1_000) squares += (out[0] as number) ** 2;
    }
    const tip = Math.sqrt(squares / 39_000) * feed.gain * feed.leverM;
    expect(tip / 0.0005).toBeCloseTo(1, 1);
  });

  it('needs no smoothing where the noise is small already', () => {
    const found = suggest({ noiseRad: 1e-4, feeds: [feed] }, { jitterM: 0.0005, lagS: 0.05 }, RATE_HZ);
    expect(found).toMatchObject({ cutoffHz: null, lagS: 0, deadbandRad: [0] });
  });

  it('does not lag more than wished, and leaves the rest to a deadband', () => {
    const found = suggest({ noiseRad, feeds: [feed] }, { jitterM: 0.00005, lagS: 0.02 }, RATE_HZ);
    expect(found.lagS).toBeCloseTo(0.02, 9);
    expect(found.tipM[0]).toBeGreaterThan(0.00005);
    const left = Math.sqrt(varianceLeft(found.cutoffHz as number, RATE_HZ));
    expect(found.deadbandRad[0]).toBeCloseTo(3.5 * noiseRad * left * feed.gain, 9);
  });
});

describe('Wiring', () => {
  const moving = (i: number): number => 500 + 300 * Math.sin(i / 30);
  const rows = (of: (i: number) => number[]): number[][] => Array.from({ length: 300 }, (_, i) => of(i));

  it('finds the input that moves, and no other', () => {
    expect(
      wiringOf(
        rows((i) => [500, moving(i), 510]),
        3,
        1023,
      ),
    ).toEqual({ input: 1, shared: [], noisy: [] });
  });

  it('finds a dead channel by nothing moving', () => {
    expect(
      wiringOf(
        rows(() => [500, 300, 510]),
        3,
        1023,
      ).input,
    ).toBeNull();
  });

  it('finds an input that moves along', () => {
    expect(
      wiringOf(
        rows((i) => [moving(i), 300, 200 + 0.5 * moving(i)]),
        3,
        1023,
      ).shared,
    ).toEqual([2]);
  });

  it('takes a pot with a dead spot for one that moves, not for one that jumps about', () => {
    const lost = (i: number): number => (moving(i) > 550 && moving(i) < 580 ? 0 : moving(i));
    const found = wiringOf(
      rows((i) => [500, lost(i), 510]),
      3,
      1023,
    );
    expect(found).toEqual({ input: 1, shared: [], noisy: [] });
  });

  it('finds an input that jumps about, and does not take it for the one that moves', () => {
    const found = wiringOf(
      rows((i) => [500, moving(i), i % 2 === 0 ? 0 : 900]),
      3,
      1023,
    );
    expect(found).toEqual({ input: 1, shared: [], noisy: [2] });
  });
});
