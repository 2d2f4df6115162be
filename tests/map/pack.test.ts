import { describe, expect, it } from 'vitest';
import { compileMap } from '../../src/map/compile.ts';
import { packMaps } from '../../src/map/pack.ts';

const POINTS = [
  [0, 10],
  [2, 30],
  [5, 36],
] as const;

describe('maps packed into one table', () => {
  it('say what each of them says, inside its points, on them and beyond', () => {
    const maps = [
      compileMap(POINTS, 'straight', 'clamp'),
      compileMap(POINTS, 'monotone', 'extend'),
      compileMap(
        [
          [-1, 4],
          [7, -4],
        ],
        'straight',
        'extend',
      ),
    ];
    const packed = packMaps(maps);
    const cells = new Float64Array(2);
    for (const [k, map] of maps.entries()) {
      for (const x of [-3, 0, 1.25, 2, 4.5, 5, 9]) {
        cells[0] = x;
        packed.apply(k, cells, 0, cells, 1);
        expect(cells[1], `map ${k} at ${x}`).toBe(map.value(x));
      }
    }
    // By hand, so that both cannot be wrong together: 10 + 1.25 * 10, and 4 - 2.25.
    cells[0] = 1.25;
    packed.apply(0, cells, 0, cells, 1);
    expect(cells[1]).toBe(22.5);
    packed.apply(2, cells, 0, cells, 1);
    expect(cells[1]).toBe(1.75);
  });
});
