import { FAINT, FONT, INK, LETTER_MM } from './ink.ts';
import { label } from './paper.ts';
import { type ColumnRun, type Trace, tracePath } from './strip-columns.ts';
import { element, escaped, hundredths } from './svg.ts';
import { timeText, timeTicks } from './time-axis.ts';

/** Why a joint did not simply do as it was asked; each has a hatching of its own beside its colour. */
export type Shade = 'clipped' | 'limited' | 'held' | 'dropout';

/** Columns in which it was so, and a word that says more, where there is room for it. */
export interface ShadedRun extends ColumnRun {
  readonly shade: Shade;
  readonly word: string;
}

/** One joint over time; everything is told by columns of the sheet. Angles are degrees. */
export interface Strip {
  readonly title: string;
  /** Drawn as dashed lines; null: none is known. */
  readonly range: readonly [number, number] | null;
  /** What was asked for; null: nothing but the angle is known. */
  readonly target: Trace | null;
  readonly angle: Trace;
  readonly shaded: readonly ShadedRun[];
}

/** The joints of one arm, under its name. */
export interface StripGroup {
  readonly title: string;
  /** A lane of words over the strips, such as states, by column; null: none. */
  readonly lane: readonly (ColumnRun & { readonly word: string })[] | null;
  readonly strips: readonly Strip[];
}

export interface StripSheet {
  readonly title: string;
  readonly subtitle: string;
  readonly durationS: number;
  readonly marks: readonly { readonly name: string; readonly atS: number }[];
  readonly groups: readonly StripGroup[];
}

/** So many columns does a sheet have, whatever time they stand for: each is a fifth of a millimetre wide. */
export const STRIP_COLUMNS = 1200;

/** As wide as an A4 page lies. Millimetres. */
const WIDTH = 297;
const LEFT = 44;
const PLOT = 240;
const RIGHT = LEFT + PLOT;
const COLUMN = PLOT / STRIP_COLUMNS;
const HEAD = 20;
const GROUP_HEAD = 8;
const LANE = 4;
const STRIP = 11.5;
const GAP = 2.5;
const AXIS = 7;
const FOOT = 11;
const MARK_ROW = 3;
const MARK_ROWS_MAX = 4;
/** About the width of a small letter. */
const LETTER = 1.25;
const TITLE_LETTERS = 15;
/** A run shorter than this has no room for its word. */
const WORD_ROOM = 4;
/** Free paper over and under what is drawn, as a share of its span; and the least span, degrees. */
const ROOM = 0.06;
const SPAN_MIN_DEG = 1;

const GREY = '#555555';
const LOOKS: Readonly<Record<Shade, { readonly ink: string; readonly word: string; readonly hatch: string }>> = {
  clipped: {
    ink: INK.vermilion,
    word: 'clipped by its range or reach',
    hatch: 'M0 2L2 0M-0.5 0.5L0.5 -0.5M1.5 2.5L2.5 1.5',
  },
  limited: { ink: INK.orange, word: 'held back by a limit', hatch: 'M0.5 0V2M1.5 0V2' },
  held: { ink: '#777777', word: 'not following', hatch: 'M0 1H2' },
  dropout: { ink: INK.blue, word: 'no readings', hatch: 'M0 0L2 2M0 2L2 0' },
};
const SHADES = Object.keys(LOOKS) as Shade[];

/** Every joint as a strip over one time axis, with marks. A whole SVG document; its size is bounded, whatever the time. */
export function stripSheet({ title, subtitle, durationS, marks, groups }: StripSheet): string {
  const toX = (s: number): number => LEFT + (durationS > 0 ? s / durationS : 0) * PLOT;
  const placed = placeMarks(marks.map(({ name, atS }) => ({ name, x: toX(atS) })));
  const rows = 1 + Math.max(-1, ...placed.map(({ row }) => row));
  const top = HEAD + rows * MARK_ROW;
  const bodies: string[] = [];
  let y = top;
  for (const group of groups) {
    bodies.push(groupOf(group, y));
    y += GROUP_HEAD + (group.lane === null ? 0 : LANE + 1) + group.strips.length * (STRIP + GAP);
  }
  const floor = y;
  const height = floor + AXIS + FOOT;
  const ticks = timeTicks(durationS);
  return `${element(
    'svg',
    {
      xmlns: 'http://www.w3.org/2000/svg',
      width: `${WIDTH}mm`,
      height: `${hundredths(height)}mm`,
      viewBox: `0 0 ${WIDTH} ${hundredths(height)}`,
      'font-family': FONT,
    },
    element('title', {}, escaped(title)),
    element('defs', {}, ...SHADES.map(hatching)),
    element('rect', { x: 0, y: 0, width: WIDTH, height, fill: '#FFFFFF' }),
    label([10, 11], title, LETTER_MM.title, 'start', INK.black),
    label([10, 16.5], subtitle, LETTER_MM.text, 'start', GREY),
    ...ticks.map((s) => upright(toX(s), top + GROUP_HEAD - 1, floor, { stroke: FAINT, 'stroke-width': 0.12 })),
    ...bodies,
    ...placed.map(({ x, name, row }) => markAt(x, name, row, top, rows, floor)),
    ...ticks.map((s) => label([toX(s), floor + 3], timeText(s), LETTER_MM.small, 'middle', INK.black)),
    legend(floor + AXIS + 4),
  )}\n`;
}

function groupOf({ title, lane, strips }: StripGroup, top: number): string {
  const first = top + GROUP_HEAD + (lane === null ? 0 : LANE + 1);
  return element(
    'g',
    {},
    element('line', { x1: 10, y1: top + 1, x2: RIGHT, y2: top + 1, stroke: FAINT, 'stroke-width': 0.3 }),
    label([10, top + 5.6], shortened(title, 60), LETTER_MM.heading, 'start', INK.black),
    ...(lane ?? []).map((run) => stateAt(run, top + GROUP_HEAD - 1)),
    ...strips.map((strip, i) => stripAt(strip, first + i * (STRIP + GAP))),
  );
}

function stateAt({ from, to, word }: ColumnRun & { readonly word: string }, y: number): string {
  const x = LEFT + from * COLUMN;
  const width = (to - from) * COLUMN;
  const box = element('rect', { x, y, width, height: LANE, fill: '#F2F2F2', stroke: FAINT, 'stroke-width': 0.2 });
  const fits = word.length * LETTER + 1.5 < width;
  return fits ? box + label([x + 1, y + 2.9], word, LETTER_MM.small, 'start', INK.black) : box;
}

function stripAt({ title, range, target, angle, shaded }: Strip, y: number): string {
  const [low, high] = spanOf(range, target, angle);
  const toY = (deg: number): number => y + STRIP - ((deg - low) / (high - low)) * STRIP;
  const toX = (column: number): number => LEFT + (column + 0.5) * COLUMN;
  const [from, to] = range ?? [low, high];
  const number = (deg: number, at: number): string =>
    label([LEFT - 1.2, at], `${deg.toFixed(1)}°`, LETTER_MM.small, 'end', GREY);
  return element(
    'g',
    {},
    label([10, y + STRIP / 2 + 1], shortened(title, TITLE_LETTERS), LETTER_MM.text, 'start', INK.black),
    ...SHADES.map((shade) => spansAt(shade, shaded, y)),
    element('rect', { x: LEFT, y, width: PLOT, height: STRIP, fill: 'none', stroke: FAINT, 'stroke-width': 0.2 }),
    ...(low < 0 && high > 0 ? [level(toY(0), { stroke: FAINT, 'stroke-width': 0.15 })] : []),
    ...(range ?? []).map((deg) =>
      level(toY(deg), { stroke: INK.black, 'stroke-width': 0.15, 'stroke-dasharray': '1.6 1' }),
    ),
    number(to, Math.max(toY(to) + 0.8, y + 2)),
    number(from, Math.min(toY(from) + 0.8, y + STRIP)),
    target === null ? '' : line(tracePath(target, toX, toY), LOOK_OF_TARGET),
    line(tracePath(angle, toX, toY), LOOK_OF_ANGLE),
  );
}

/** What is asked for is a broad pale line, what is commanded a thin dark one on it: they differ in print without colour. */
const LOOK_OF_TARGET = { stroke: INK.sky, 'stroke-width': 1 } as const;
const LOOK_OF_ANGLE = { stroke: INK.black, 'stroke-width': 0.28 } as const;

function line(d: string, look: typeof LOOK_OF_TARGET | typeof LOOK_OF_ANGLE): string {
  return d === ''
    ? ''
    : element('path', { d, fill: 'none', 'stroke-linejoin': 'round', 'stroke-linecap': 'round', ...look });
}

function shortened(text: string, letters: number): string {
  return text.length <= letters ? text : `${text.slice(0, letters - 1)}…`;
}

function spanOf(range: Strip['range'], target: Trace | null, angle: Trace): readonly [number, number] {
  let [low, high] = range ?? [Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY];
  for (const trace of target === null ? [angle] : [angle, target]) {
    for (const value of trace.least) if (value < low) low = value;
    for (const value of trace.most) if (value > high) high = value;
  }
  if (!(low <= high)) return [-1, 1];
  const room = Math.max(ROOM * (high - low), (SPAN_MIN_DEG - (high - low)) / 2);
  return [low - room, high + room];
}

/** All spans of one kind as one path, and the word of each that is wide enough for it. */
function spansAt(shade: Shade, shaded: readonly ShadedRun[], y: number): string {
  const runs = shaded.filter((run) => run.shade === shade);
  if (runs.length === 0) return '';
  const d = runs.map(({ from, to }) => {
    const width = hundredths((to - from) * COLUMN);
    return `M${hundredths(LEFT + from * COLUMN)} ${hundredths(y)}h${width}v${STRIP}h-${width}z`;
  });
  const words = runs
    .filter(({ from, to, word }) => (to - from) * COLUMN > word.length * LETTER + WORD_ROOM)
    .map(({ from, word }) =>
      label([LEFT + from * COLUMN + 1, y + STRIP - 1.6], word, LETTER_MM.small, 'start', '#333333'),
    );
  const { ink } = LOOKS[shade];
  return element('path', { d: d.join(''), fill: `url(#${shade})`, stroke: ink, 'stroke-width': 0.1 }) + words.join('');
}

function hatching(shade: Shade): string {
  const { ink, hatch } = LOOKS[shade];
  return element(
    'pattern',
    { id: shade, width: 2, height: 2, patternUnits: 'userSpaceOnUse' },
    element('rect', { x: 0, y: 0, width: 2, height: 2, fill: ink, 'fill-opacity': 0.12 }),
    element('path', { d: hatch, stroke: ink, 'stroke-width': 0.2, 'stroke-opacity': 0.7, fill: 'none' }),
  );
}

interface PlacedMark {
  readonly name: string;
  readonly x: number;
  /** -1: its name found no room. */
  readonly row: number;
}

/** Names stand in rows over the strips; marks of one column are one, and a name that finds no room is left out. */
function placeMarks(marks: readonly { readonly name: string; readonly x: number }[]): readonly PlacedMark[] {
  const ends = Array.from({ length: MARK_ROWS_MAX }, () => Number.NEGATIVE_INFINITY);
  const placed: PlacedMark[] = [];
  let lastX = Number.NEGATIVE_INFINITY;
  for (const { name, x } of marks) {
    if (x - lastX < COLUMN) continue;
    lastX = x;
    const width = name.length * LETTER + 2;
    // A name near the right edge stands left of its line.
    const from = x + width > WIDTH ? x - width : x;
    const row = ends.findIndex((end) => end <= from);
    if (row >= 0) ends[row] = from + width;
    placed.push({ name, x, row });
  }
  return placed;
}

function markAt(x: number, name: string, row: number, top: number, rows: number, floor: number): string {
  const y = row < 0 ? top : top - (rows - row) * MARK_ROW;
  const isLate = x + name.length * LETTER + 2 > WIDTH;
  return (
    upright(x, y, floor, { stroke: INK.green, 'stroke-width': 0.3, 'stroke-dasharray': '2.4 0.6 0.5 0.6' }) +
    (row < 0
      ? ''
      : label([isLate ? x - 0.8 : x + 0.8, y + 2.2], name, LETTER_MM.small, isLate ? 'end' : 'start', INK.green))
  );
}

function upright(x: number, y1: number, y2: number, look: Readonly<Record<string, string | number>>): string {
  return element('line', { x1: x, y1, x2: x, y2, ...look });
}

function level(y: number, look: Readonly<Record<string, string | number>>): string {
  return element('line', { x1: LEFT, y1: y, x2: RIGHT, y2: y, ...look });
}

function legend(y: number): string {
  const sample = (look: Readonly<Record<string, string | number>>): string =>
    element('line', { x1: 0, y1: -0.8, x2: 8, y2: -0.8, ...look });
  const entries: readonly (readonly [string, string])[] = [
    [sample(LOOK_OF_TARGET), 'asked for'],
    [sample(LOOK_OF_ANGLE), 'commanded'],
    [sample({ stroke: INK.black, 'stroke-width': 0.15, 'stroke-dasharray': '1.6 1' }), 'range'],
    [sample({ stroke: INK.green, 'stroke-width': 0.3, 'stroke-dasharray': '2.4 0.6 0.5 0.6' }), 'mark'],
    ...SHADES.map((shade): readonly [string, string] => [
      element('rect', {
        x: 0,
        y: -2.4,
        width: 8,
        height: 3.2,
        fill: `url(#${shade})`,
        stroke: LOOKS[shade].ink,
        'stroke-width': 0.1,
      }),
      LOOKS[shade].word,
    ]),
  ];
  let x = 10;
  return entries
    .map(([look, words]) => {
      const at = x;
      x += 11 + words.length * LETTER + 4;
      const text = label([9.5, 0], words, LETTER_MM.small, 'start', INK.black);
      return element('g', { transform: `translate(${hundredths(at)} ${hundredths(y)})` }, look, text);
    })
    .join('');
}
