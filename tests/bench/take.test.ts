import { expect, it } from 'vitest';
import { takeFigures, takeReport } from '../../tools/bench/take.ts';

it('the bench of takes records, opens, shows and exports, however small it is run', async () => {
  const figures = await takeFigures({ readings: 300, rows: 200 });
  expect(figures.rates.map(({ what }) => what)).toEqual([
    'a plain Arrow copy',
    'open',
    'show',
    'export to CSV',
    'export to Parquet',
  ]);
  for (const { rowsPerS } of figures.rates) expect(rowsPerS).toBeGreaterThan(0);
  expect(figures.rows).toBe(200);
  expect(takeReport(figures)).toMatch(/% of a core/);
}, 60_000);
