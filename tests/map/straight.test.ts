import { describe, expect, it } from 'vitest';
import { compileMap } from '../../src/map/compile.ts';

/** A pot over 240 degrees with its middle off the centre. */
const POT: [number, number][] = [
  [112, -120],
  [512, 0],
  [911, 120],
];

/** The mirror image of a servo: degrees rise, microseconds fall. */
const MIRRORED: [number, number][] = [
  [-90, 2440],
  [0, 1500],
  [90, 560],
];

describe('a straight map', () => {
  it('goes through its points and straight between them', () => {
    const map = compileMap(POT, 'straight', 'extend');
    for (const [x, y] of POT) expect(map.value(x)).toBe(y);
    // By hand: half way between 112 and 512 is 312, half way between -120 and 0 is -60.
    expect(map.value(312)).toBeCloseTo(-60, 12);
    // By hand: (611.75 - 512) / (911 - 512) = 0.25, so a quarter of 120.
    expect(map.value(611.75)).toBeCloseTo(30, 12);
  });

  it('goes on along the slope of its ends where it is to extend', () => {
    const map = compileMap(POT, 'straight', 'extend');
    // By hand: slope 120 / 400 = 0.3 below, 120 / 399 above.
    expect(map.value(102)).toBeCloseTo(-123, 12);
    expect(map.value(951)).toBeCloseTo(120 + (40 * 120) / 399, 12);
    expect(map.inverse(-123)).toBeCloseTo(102, 10);
  });

  it('stays at the value of its ends where it is to clamp', () => {
    const map = compileMap(MIRRORED, 'straight', 'clamp');
    expect([map.value(-90.1), map.value(-1e9), map.value(90.1), map.value(1e9)]).toEqual([2440, 2440, 560, 560]);
    expect([map.inverse(2441), map.inverse(5000), map.inverse(559), map.inverse(-1)]).toEqual([-90, -90, 90, 90]);
  });

  it('says its span rising, whichever way it runs', () => {
    expect(compileMap(POT, 'straight', 'clamp')).toMatchObject({ falling: false, xMin: 112, xMax: 911 });
    const mirrored = compileMap(MIRRORED, 'straight', 'clamp');
    expect(mirrored).toMatchObject({ falling: true, xMin: -90, xMax: 90, yMin: 560, yMax: 2440 });
  });

  it('falls as straight as it rises', () => {
    const map = compileMap(MIRRORED, 'straight', 'clamp');
    // By hand: a third of the way from 0 to 90 takes a third of 940 off 1500.
    expect(map.value(30)).toBeCloseTo(1500 - 940 / 3, 10);
    expect(map.inverse(1500 - 940 / 3)).toBeCloseTo(30, 10);
  });

  it('writes into a slot what it says', () => {
    const map = compileMap(POT, 'straight', 'extend');
    const output = new Float64Array(3);
    map.apply(Float64Array.of(7, 312), 1, output, 2);
    expect([...output]).toEqual([0, 0, map.value(312)]);
  });
});

describe('a list of points that is no map', () => {
  it.each<[string, [number, number][]]>([
    ['one point', [[0, 0]]],
    ['none', []],
    [
      'a repeated input',
      [
        [0, 0],
        [1, 1],
        [1, 2],
      ],
    ],
    [
      'an input that turns back',
      [
        [0, 0],
        [2, 1],
        [1, 2],
      ],
    ],
    [
      'a value that repeats',
      [
        [0, 0],
        [1, 1],
        [2, 1],
      ],
    ],
    [
      'a value that turns back',
      [
        [0, 0],
        [1, 2],
        [2, 1],
      ],
    ],
    [
      'a falling value that turns back',
      [
        [0, 2],
        [1, 1],
        [2, 3],
      ],
    ],
    [
      'a value that is no number',
      [
        [0, 0],
        [1, Number.NaN],
      ],
    ],
    [
      'an input that is no number',
      [
        [0, 0],
        [Number.NaN, 1],
      ],
    ],
  ])('%s is refused', (_, points) => {
    for (const curve of ['straight', 'monotone'] as const)
      expect(() => compileMap(points, curve, 'clamp')).toThrow(RangeError);
  });
});
