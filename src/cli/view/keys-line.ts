import { BINDINGS, INTERRUPT_HELP, SELECT_HELP } from '../keys.ts';
import { type Line, span, type Span, wrapped } from './layout.ts';

const GAP = 2;

interface Label {
  readonly sign: string;
  readonly label: string;
}

/** The keys in at most `rows` lines: those shown last in the list go first where there is no room, help never. */
export function keyLines(followers: number, width: number, rows: number): readonly Line[] {
  const select: Label = { sign: followers > 1 ? `1-${Math.min(followers, 9)}` : '', label: 'one' };
  const bound = BINDINGS.map(({ sign, label }) => ({ sign, label }));
  const labels = followers > 1 ? [...bound.slice(0, -3), select, ...bound.slice(-3)] : bound;
  const last = labels.at(-1) as Label;
  for (let count = labels.length - 1; count >= 0; count--) {
    const lines = filled([...labels.slice(0, count), last], width);
    if (lines.length <= rows) return lines;
  }
  return [];
}

function filled(labels: readonly Label[], width: number): readonly Line[] {
  const lines: Span[][] = [];
  let used = Number.POSITIVE_INFINITY;
  for (const { sign, label } of labels) {
    const room = sign.length + 1 + label.length;
    if (used + GAP + room > width) {
      lines.push([]);
      used = -GAP;
    }
    const gap = used < 0 ? 0 : GAP;
    lines.at(-1)?.push(span(`${' '.repeat(gap)}${sign}`, 'strong'), span(` ${label}`));
    used += GAP + room;
  }
  return lines;
}

/** The page of keys; what does not fit into `rows` lines is left out, and said. */
export function helpLines(followers: number, width: number): readonly Line[] {
  const entries = BINDINGS.map(({ sign, help }) => [sign, help] as const);
  const select = followers > 1 ? [[`1-${Math.min(followers, 9)}`, SELECT_HELP] as const] : [];
  const all = [...entries.slice(0, -3), ...select, ...entries.slice(-3), ['Ctrl-C', INTERRUPT_HELP] as const];
  const signWidth = Math.max(...all.map(([sign]) => sign.length)) + 2;
  return all.flatMap(([sign, help]) =>
    wrapped(help, width - signWidth).map(
      (piece, i): Line => [span(i === 0 ? sign.padEnd(signWidth) : ' '.repeat(signWidth), 'strong'), span(piece)],
    ),
  );
}
