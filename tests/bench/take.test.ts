import { expect, it } from 'vitest';
import { TAKE_SIZES, takeFigures, takeReport } from '../../tools/bench/take.ts';

it('the bench of takes records, opens, shows, exports and plays, however small it is run', async () => {
  const figures = await takeFigures(TAKE_SIZES.tiny);
  expect(figures.rates.map(({ what }) => what)).toEqual([
    'a plain Arrow copy',
    'open',
    'show',
    'export to CSV',
    'export to JSON Lines',
    'export to Parquet',
  ]);
  for (const { rowsPerS } of figures.rates) expect(rowsPerS).toBeGreaterThan(0);
  expect(figures.rows).toBe(2_000);
  expect(figures.memory.map(({ what }) => what)).toEqual(['record', 'show', 'play', 'export']);
  for (const { peakMegabytes } of figures.memory) for (const peak of peakMegabytes) expect(peak).toBeGreaterThan(10);
  expect(takeReport(figures)).toMatch(/% of a core/);
}, 120_000);
