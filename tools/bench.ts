/**
 * How long a reading takes from bytes to bytes, against a tight loop, stock operators and a hobbyist's script.
 * `npm run bench`; `--json` for machines, `--tiny` for a run of a few seconds. Figures are printed, never gated.
 */
import { perform } from './bench/child.ts';
import { measure, SIZES } from './bench/rounds.ts';
import { report } from './bench/report.ts';
import { targets } from './bench/targets.ts';
import type { Task } from './bench/task.ts';

const [option = '', task = ''] = process.argv.slice(2);
if (option === '--task') console.log(JSON.stringify(await perform(JSON.parse(task) as Task)));
else {
  const asked = new Set(process.argv.slice(2));
  const figures = await measure(asked.has('--tiny') ? SIZES.tiny : SIZES.whole, (line) => console.error(line));
  // Not loaded by the processes that measure: what they have compiled before moves their figures.
  const { TAKE_SIZES, takeFigures, takeReport } = await import('./bench/take.ts');
  const { ARM_SIZES, armFigures, armReport } = await import('./bench/arm.ts');
  const arms = armFigures(asked.has('--tiny') ? ARM_SIZES.tiny : ARM_SIZES.whole);
  const takes = await takeFigures(asked.has('--tiny') ? TAKE_SIZES.tiny : TAKE_SIZES.whole);
  console.log(
    asked.has('--json')
      ? JSON.stringify({ ...figures, targets: targets(figures), arms, takes }, null, 2)
      : `${report(figures)}\n${armReport(arms)}\n${takeReport(takes)}`,
  );
}
