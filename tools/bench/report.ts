import type { Figures } from './rounds.ts';
import type { WayName } from './task.ts';
import { type Target, targets, WIRE_US } from './targets.ts';

const TITLES: Readonly<Record<WayName, string>> = {
  whole: '(a) the program',
  tight: '(b) a tight loop by hand',
  stock: '(c) stock operators',
  hobby: "(d) a hobbyist's script",
  lines: '(a) over text lines',
};

/** The table people read. */
export function report(figures: Figures): string {
  const { size, paced } = figures;
  return [
    `One reading of 8 joints, bytes to bytes, on Node ${figures.node}; microseconds.`,
    `Medians over ${size.rounds} rounds, each way in a process of its own; the worst is the worst of all.`,
    "Bytes are allocated per reading; ES2015: with that build of RxJS. Pauses are the collector's, with their share of time.",
    '',
    line('followers', 'way', 'median', 'p99', 'worst', 'over (a)', 'bytes', 'ES2015', 'gc pauses', 'longest'),
    ...figures.rows.map((row) =>
      line(
        String(row.followers),
        TITLES[row.way],
        row.time.medianUs.toFixed(2),
        row.time.p99Us.toFixed(1),
        row.time.worstUs.toFixed(0),
        row.overProgram.toFixed(2),
        row.bytes.toFixed(0),
        row.bytesEs2015?.toFixed(0) ?? '-',
        `${row.time.gc.pauses} (${(100 * row.time.gc.shareOfTime).toFixed(1)} %)`,
        row.time.gc.longestUs.toFixed(0),
      ),
    ),
    '',
    `At a true 1 kHz, ${Math.max(...size.followers)} followers, every one due on every reading:`,
    `  lag added: median ${us(paced.medianUs)}, p99 ${us(paced.p99Us)}, worst ${us(paced.worstUs)}`,
    `  share of the ${WIRE_US.toFixed(0)} us that one command takes at 115200 baud: median ${percent(paced.medianUs)}, p99 ${percent(paced.p99Us)}`,
    `  the collector: ${paced.gc.pauses} pauses, longest ${us(paced.gc.longestUs)}`,
    '',
    ...targets(figures).map(targetLine),
  ].join('\n');
}

const WIDTHS = [9, 26, 9, 9, 9, 9, 9, 7, 13, 9] as const;

function line(...cells: readonly string[]): string {
  return cells
    .map((cell, i) => (i === 1 ? `  ${cell.padEnd((WIDTHS[i] as number) - 2)}` : cell.padStart(WIDTHS[i] as number)))
    .join('');
}

function targetLine(target: Target): string {
  const measured = `${target.measured.toFixed(2)} ${target.unit}`;
  return `${target.what.padEnd(44)}${measured.padStart(16)}   ${target.asked.padEnd(14)}${target.met ? 'met' : 'not met'}`;
}

function us(value: number): string {
  return `${value.toFixed(1)} us`;
}

function percent(value: number): string {
  return `${((100 * value) / WIRE_US).toFixed(1)} %`;
}
