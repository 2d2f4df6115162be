import type { DrawnArm } from './arm-shapes.ts';
import { elevation, paperOf, windowOf } from './elevation.ts';
import { envelopes } from './envelope.ts';
import { FAINT, FONT, INK, LETTER_MM } from './ink.ts';
import { label } from './paper.ts';
import type { Window } from './paper.ts';
import { paperScale, scaleText } from './paper-scale.ts';
import { element, escaped } from './svg.ts';

/** One row of a sheet: an arm from two sides, with figures beside it. */
export interface SheetRow extends DrawnArm {
  readonly title: string;
  /** Lines of figures: what, and how much. `marked` ones are over a limit. */
  readonly figures: readonly { readonly what: string; readonly value: string; readonly marked: boolean }[];
}

/** A sheet as wide as an A4 page lies or an A3 page stands; three rows fill an A3 page. Millimetres. */
const WIDTH = 297;
const MARGIN = 10;
const HEAD = 18;
const FOOT = 14;
const ROW = 128;
const TITLE = 8;
const GAP = 4;
const SIDE = { width: 112, height: ROW - TITLE - 4 };
const PLAN = { width: 106, height: SIDE.height };

/**
 * Arms from the side and from above, each row to a scale of its own that is true when the sheet is printed at full size.
 * A whole SVG document.
 */
export function armSheet(title: string, rows: readonly SheetRow[]): string {
  const height = HEAD + rows.length * ROW + FOOT;
  return `${element(
    'svg',
    {
      xmlns: 'http://www.w3.org/2000/svg',
      width: `${WIDTH}mm`,
      height: `${height}mm`,
      viewBox: `0 0 ${WIDTH} ${height}`,
      'font-family': FONT,
    },
    element('title', {}, escaped(title)),
    element('defs', {}, hatching()),
    element('rect', { x: 0, y: 0, width: WIDTH, height, fill: '#FFFFFF' }),
    label([MARGIN, 12], title, LETTER_MM.title, 'start', INK.black),
    label(
      [WIDTH - MARGIN, 12],
      'lengths in millimetres; scales are true at full size of print',
      LETTER_MM.text,
      'end',
      INK.black,
    ),
    ...rows.map((row, i) => rowOf(row, HEAD + i * ROW)),
    legend(height - FOOT + 5),
  )}\n`;
}

function rowOf(row: SheetRow, top: number): string {
  const shapes = envelopes(row.arm, row.ranges);
  const windows = { side: windowOf('side', row, shapes), plan: windowOf('plan', row, shapes) };
  const n = Math.max(fitting(windows.side, SIDE), fitting(windows.plan, PLAN));
  const y = top + TITLE;
  const planX = MARGIN + SIDE.width + GAP;
  const figuresX = planX + PLAN.width + GAP + 1;
  return element(
    'g',
    {},
    element('line', { x1: MARGIN, y1: top, x2: WIDTH - MARGIN, y2: top, stroke: FAINT, 'stroke-width': 0.3 }),
    label([MARGIN, top + 6], row.title, LETTER_MM.heading, 'start', INK.black),
    label([planX + PLAN.width, top + 6], scaleText(n), LETTER_MM.heading, 'end', INK.black),
    elevation('side', row, shapes.side, windows.side, { x: MARGIN, y, ...SIDE }, n),
    elevation('plan', row, shapes.plan, windows.plan, { x: planX, y, ...PLAN }, n),
    ...row.figures.map(({ what, value, marked }, i) => figure(what, value, marked, figuresX, y + 3 + i * 7.4)),
  );
}

/** The scale at which a window and the room for its labels fit. */
function fitting(window: Window, { width, height }: { width: number; height: number }): number {
  const bare = paperOf(window, Number.POSITIVE_INFINITY);
  const room = { width: (width - bare.width) / 1000, height: (height - bare.height) / 1000 };
  return Math.max(
    paperScale(window.uMax - window.uMin, room.width),
    paperScale(window.vMax - window.vMin, room.height),
  );
}

function figure(what: string, value: string, marked: boolean, x: number, y: number): string {
  const sign = marked ? 'OVER: ' : '';
  const fill = marked ? INK.vermilion : INK.black;
  return `${label([x, y], what, LETTER_MM.small, 'start', '#555555')}${label([x, y + 3.4], `${sign}${value}`, LETTER_MM.text, 'start', fill)}`;
}

function hatching(): string {
  return element(
    'pattern',
    { id: 'keep-out', width: 2.4, height: 2.4, patternUnits: 'userSpaceOnUse', patternTransform: 'rotate(45)' },
    element('line', {
      x1: 0,
      y1: 0,
      x2: 0,
      y2: 2.4,
      stroke: INK.vermilion,
      'stroke-width': 0.35,
      'stroke-opacity': 0.7,
    }),
  );
}

/** What the lines mean: each by its look and its word. */
function legend(y: number): string {
  const entries: readonly (readonly [string, string])[] = [
    [sample(INK.black, 0.8, 'none'), 'rest pose'],
    [sample(INK.vermilion, 0.8, '2.4 1.2'), 'pose of the highest load'],
    [sample(INK.blue, 0.3, '3 0.8 0.6 0.8'), 'where the tip can be'],
    [
      element('rect', {
        x: 0,
        y: -2,
        width: 10,
        height: 3,
        fill: 'url(#keep-out)',
        stroke: INK.vermilion,
        'stroke-width': 0.3,
      }),
      'keep-out',
    ],
    [sample(INK.green, 0.6, '1.6 0.5 0.4 0.5 0.4 0.5'), 'footprint'],
    [
      element('circle', { cx: 8, cy: -0.5, r: 1.5, fill: INK.orange, stroke: INK.black, 'stroke-width': 0.25 }),
      'counterweight, at rest',
    ],
  ];
  return entries
    .map(([look, words], i) =>
      element(
        'g',
        { transform: `translate(${MARGIN + i * 46} ${y})` },
        look,
        label([12, 0.5], words, LETTER_MM.small, 'start', INK.black),
      ),
    )
    .join('');
}

function sample(stroke: string, width: number, dashes: string): string {
  return element('line', {
    x1: 0,
    y1: -0.5,
    x2: 10,
    y2: -0.5,
    stroke,
    'stroke-width': width,
    'stroke-dasharray': dashes,
  });
}
