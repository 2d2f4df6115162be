import { CAPTURE_COLUMNS, CAPTURE_STEPS, type Capture, type CaptureStep } from '../fit/captures.ts';
import { nearest } from '../port/nearest.ts';
import { type Cell, cellsOf, LINE_CHARACTERS_MAX } from './csv-cells.ts';
import type { CsvMistake } from './csv-mistake.ts';

/** Captures of a file, or everything that is wrong with it. */
export type CapturesRead = { readonly captures: readonly Capture[] } | { readonly mistakes: readonly CsvMistake[] };

const MISTAKES_MAX = 20;
const NUMBER = /^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i;
const NEEDED = ['step', 'arm', 'joint', 'counts', 'pulse_us', 'known_deg'] as const;

type Column = (typeof CAPTURE_COLUMNS)[number];

/** Columns that are not known are left alone: other programs may keep their own there. */
export function readCaptures(text: string): CapturesRead {
  const mistakes: CsvMistake[] = [];
  const captures: Capture[] = [];
  const rows = text.replace(/^\uFEFF/, '').split(/\r?\n/);
  const header = headerOf(rows[0] ?? '', mistakes);
  if (mistakes.length > 0) return { mistakes };
  for (let line = 2; line <= rows.length && mistakes.length < MISTAKES_MAX; line++) {
    const row = rows[line - 1] as string;
    if (row.trim() === '') continue;
    const capture = captureOf(row, line, header, mistakes);
    if (capture !== null) captures.push(capture);
  }
  return mistakes.length > 0 ? { mistakes } : { captures };
}

function headerOf(row: string, mistakes: CsvMistake[]): readonly (Column | null)[] {
  const cells = cellsOf(row);
  const names = cells.map(({ text }) => text);
  for (const name of NEEDED) {
    if (names.includes(name)) continue;
    const near = nearest(name, names);
    const right = near === null ? `begin the file with ${NEEDED.join(',')}` : `"${near}" may be meant for it`;
    mistakes.push({ line: 1, column: 1, wrong: `column ${name} is missing`, right });
  }
  for (const [i, { text, column }] of cells.entries()) {
    if (names.indexOf(text) < i)
      mistakes.push({ line: 1, column, wrong: `column ${text} stands here again`, right: 'keep one of the two' });
  }
  return names.map((name) => CAPTURE_COLUMNS.find((known) => known === name) ?? null);
}

function captureOf(
  row: string,
  line: number,
  header: readonly (Column | null)[],
  mistakes: CsvMistake[],
): Capture | null {
  const before = mistakes.length;
  const mistaken = (column: number, wrong: string, right: string): void => {
    mistakes.push({ line, column, wrong, right });
  };
  if (row.length > LINE_CHARACTERS_MAX) {
    mistaken(1, 'the line is longer than any capture', 'check that the file is CSV');
    return null;
  }
  const cells = cellsOf(row);
  if (cells.length !== header.length) {
    mistaken(1, `${cells.length} cells under ${header.length} columns`, 'give each column a cell, empty if need be');
    return null;
  }
  const cell = (name: Column): Cell => cells[header.indexOf(name)] ?? { text: '', column: 1 };
  const number = (name: Column): number => {
    const { text, column } = cell(name);
    if (text === '') return Number.NaN;
    if (!NUMBER.test(text)) mistaken(column, `"${text}" is no number`, 'write a plain number, with a decimal point');
    return Number(text);
  };
  const step = stepOf(cell('step'), mistaken);
  for (const name of ['arm', 'joint'] as const) {
    if (cell(name).text === '') mistaken(cell(name).column, `${name} is empty`, `name the ${name}`);
  }
  const capture: Capture = {
    step: step ?? 'leader-point',
    arm: cell('arm').text,
    joint: cell('joint').text,
    counts: number('counts'),
    pulseUs: number('pulse_us'),
    knownDeg: number('known_deg'),
    tMs: number('t_ms'),
    noiseCounts: number('noise_counts'),
    moved: number('moved'),
    channel: number('channel'),
    attempt: number('attempt'),
  };
  const has: Readonly<Record<string, number>> = {
    counts: capture.counts,
    pulse_us: capture.pulseUs,
    known_deg: capture.knownDeg,
    moved: capture.moved,
  };
  if (!Number.isNaN(capture.moved) && capture.moved !== 0 && capture.moved !== 1)
    mistaken(
      cell('moved').column,
      `"${cell('moved').text}" is neither 1 nor 0`,
      'write 1 where it moved, 0 where it stood',
    );
  for (const name of step === null ? [] : CAPTURE_STEPS[step]) {
    if (cell(name).text === '' && Number.isNaN(has[name]))
      mistaken(
        cell(name).column,
        `a ${step} needs ${name}`,
        `write ${CAPTURE_STEPS[step as CaptureStep].join(' and ')}`,
      );
  }
  return mistakes.length > before ? null : capture;
}

function stepOf(
  { text, column }: Cell,
  mistaken: (column: number, wrong: string, right: string) => void,
): CaptureStep | null {
  if (text in CAPTURE_STEPS) return text as CaptureStep;
  const known = Object.keys(CAPTURE_STEPS);
  const near = nearest(text, known);
  mistaken(
    column,
    `there is no step "${text}"`,
    near === null ? `steps are ${known.join(', ')}` : `did you mean ${near}?`,
  );
  return null;
}

/** The header line, with its end. */
export const CAPTURES_HEADER = `${CAPTURE_COLUMNS.join(',')}\n`;

/** One capture as a line, with its end. Numbers in shortest round-trip form. */
export function captureLine(capture: Capture): string {
  const { step, arm, joint, counts, pulseUs, knownDeg, tMs, noiseCounts, moved, channel, attempt } = capture;
  const cells = [counts, pulseUs, knownDeg, tMs, noiseCounts, moved, channel, attempt].map((value) =>
    Number.isNaN(value) ? '' : String(value),
  );
  return `${[step, arm, joint, ...cells].join(',')}\n`;
}
