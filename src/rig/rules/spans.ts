import type { Path } from '../located.ts';
import type { Note } from './note.ts';

export type Span = readonly [number, number];
export type Pairs = readonly (readonly [number, number])[];

/** Notes a span that is not written lower first. */
export function spanRule(span: Span | undefined, unit: string, path: Path, note: Note): void {
  if (span === undefined || span[0] < span[1]) return;
  const [a, b] = span;
  const wrong = `${a} to ${b} ${unit} is no span`;
  note('RIG_SPAN_ORDER', path, wrong, a === b ? 'give two different ends' : `write the lower end first: [${b}, ${a}]`);
}

/** Whether a span can be measured against: a turned one is a mistake of its own, told once. */
export function isSpan(span: Span | undefined): span is Span {
  return span !== undefined && span[0] < span[1];
}

/** The outer ends of one column of points, rising; null while there are none. */
export function columnSpan(points: Pairs | undefined, column: 0 | 1): Span | null {
  if (points === undefined || points.length === 0) return null;
  const values = points.map((pair) => pair[column]);
  return [Math.min(...values), Math.max(...values)];
}

/** Notes the first point that repeats a value or turns back, in either column. */
export function pointsRule(points: Pairs | undefined, units: readonly [string, string], path: Path, note: Note): void {
  for (const column of [0, 1] as const) {
    const turn = points === undefined ? null : firstTurn(points.map((pair) => pair[column]));
    if (turn === null) continue;
    const { index, value, before, repeats } = turn;
    const wrong = repeats
      ? `${value} ${units[column]} stands twice`
      : `${value} ${units[column]} turns back after ${before}`;
    note('RIG_POINTS_ORDER', [...path, index], wrong, 'a map rises or falls, not both: mend or remove this point');
    return;
  }
}

function firstTurn(
  values: readonly number[],
): { index: number; value: number; before: number; repeats: boolean } | null {
  const direction = Math.sign((values[1] ?? 0) - (values[0] ?? 0));
  for (const [i, value] of values.entries()) {
    const before = values[i - 1];
    if (before === undefined) continue;
    if (value === before || Math.sign(value - before) !== direction)
      return { index: i, value, before, repeats: value === before };
  }
  return null;
}
