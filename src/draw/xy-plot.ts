import { FAINT, FONT, INK, LETTER_MM } from './ink.ts';
import { roundLength } from './paper-scale.ts';
import { element, escaped, pathData } from './svg.ts';

export type Pair = readonly [number, number];

/** What is drawn into a plot, in the order given. Shapes and dashes differ, so that no colour speaks alone. */
export type Series =
  | { readonly kind: 'dots'; readonly at: readonly Pair[]; readonly ink: string; readonly mark: 'dot' | 'cross' }
  | { readonly kind: 'line'; readonly at: readonly Pair[]; readonly ink: string; readonly dashes?: string }
  | { readonly kind: 'bars'; readonly at: readonly Pair[]; readonly ink: string; readonly width: number }
  /** A stretch of x over the whole height, with a word. */
  | { readonly kind: 'stretch'; readonly from: number; readonly to: number; readonly word: string }
  /** A stretch of y over the whole width. */
  | { readonly kind: 'shelf'; readonly from: number; readonly to: number; readonly word: string };

export interface Plot {
  readonly title: string;
  readonly x: string;
  readonly y: string;
  readonly series: readonly Series[];
}

const WIDTH = 88;
const HEIGHT = 58;
const LEFT = 14;
const BOTTOM = 11;
const TOP = 7;
const RIGHT = 3;
const TICKS = 5;
/** Free paper around what is drawn, as a share of its span. */
const ROOM = 0.05;
/** Paths are thinned to as many points as can be told apart on paper. */
const PATH_POINTS_MAX = 1200;

/** One plot as an SVG element, 88 by 58 millimetres on paper. Empty series make an empty frame. */
export function xyPlot({ title, x, y, series }: Plot): string {
  const all = series.flatMap(pairsOf);
  const [xLow, xHigh] = spanOf(all.map(([u]) => u));
  const [yLow, yHigh] = spanOf(all.map(([, v]) => v));
  const to = ([u, v]: Pair): Pair => [
    LEFT + ((u - xLow) / (xHigh - xLow)) * (WIDTH - LEFT - RIGHT),
    HEIGHT - BOTTOM - ((v - yLow) / (yHigh - yLow)) * (HEIGHT - BOTTOM - TOP),
  ];
  const right = WIDTH - RIGHT;
  const floor = HEIGHT - BOTTOM;
  const text = (at: Pair, size: number, anchor: string, words: string, turned = false): string =>
    element(
      'text',
      {
        x: at[0],
        y: at[1],
        'font-size': size,
        'text-anchor': anchor,
        fill: INK.black,
        ...(turned ? { transform: `rotate(-90 ${at[0]} ${at[1]})` } : {}),
      },
      escaped(words),
    );
  const line = (a: Pair, b: Pair): string =>
    element('line', { x1: a[0], y1: a[1], x2: b[0], y2: b[1], stroke: FAINT, 'stroke-width': 0.15 });
  return element(
    'svg',
    {
      xmlns: 'http://www.w3.org/2000/svg',
      viewBox: `0 0 ${WIDTH} ${HEIGHT}`,
      width: `${WIDTH}mm`,
      height: `${HEIGHT}mm`,
      'font-family': FONT,
      role: 'img',
    },
    element('title', {}, escaped(title)),
    text([LEFT, 4.5], LETTER_MM.text, 'start', title),
    ...ticks(xLow, xHigh).flatMap((at) => [
      line([to([at, yLow])[0], TOP], [to([at, yLow])[0], floor]),
      text([to([at, yLow])[0], floor + 3.4], LETTER_MM.small, 'middle', tickText(at)),
    ]),
    ...ticks(yLow, yHigh).flatMap((at) => [
      line([LEFT, to([xLow, at])[1]], [right, to([xLow, at])[1]]),
      text([LEFT - 1, to([xLow, at])[1] + 0.8], LETTER_MM.small, 'end', tickText(at)),
    ]),
    element('rect', {
      x: LEFT,
      y: TOP,
      width: right - LEFT,
      height: floor - TOP,
      fill: 'none',
      stroke: INK.black,
      'stroke-width': 0.2,
    }),
    text([(LEFT + right) / 2, HEIGHT - 1.6], LETTER_MM.small, 'middle', x),
    text([3, (TOP + floor) / 2], LETTER_MM.small, 'middle', y, true),
    ...series.map((each) => drawn(each, to, { top: TOP, floor, left: LEFT, right })),
  );
}

function pairsOf(series: Series): readonly Pair[] {
  switch (series.kind) {
    case 'bars':
      return series.at.flatMap(([u, v]): Pair[] => [
        [u - series.width / 2, 0],
        [u + series.width / 2, v],
      ]);
    case 'stretch':
    case 'shelf':
      return [];
    default:
      return series.at;
  }
}

function spanOf(values: readonly number[]): Pair {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const value of values) {
    low = Math.min(low, value);
    high = Math.max(high, value);
  }
  if (!Number.isFinite(low)) return [0, 1];
  const room = high > low ? ROOM * (high - low) : Math.max(Math.abs(high), 1) * ROOM;
  return [low - room, high + room];
}

function ticks(low: number, high: number): readonly number[] {
  const step = roundLength((high - low) / (TICKS - 1));
  const first = Math.ceil(low / step);
  return Array.from({ length: Math.floor(high / step) - first + 1 }, (_, i) => (first + i) * step);
}

function tickText(value: number): string {
  return String(Number(value.toPrecision(6)));
}

interface Box {
  readonly top: number;
  readonly floor: number;
  readonly left: number;
  readonly right: number;
}

function drawn(series: Series, to: (pair: Pair) => Pair, { top, floor, left, right }: Box): string {
  switch (series.kind) {
    case 'dots':
      return series.at
        .map(to)
        .map(([cx, cy]) =>
          series.mark === 'dot'
            ? element('circle', { cx, cy, r: 0.9, fill: series.ink })
            : element('path', {
                d: `M${cx - 1.2} ${cy - 1.2}L${cx + 1.2} ${cy + 1.2}M${cx - 1.2} ${cy + 1.2}L${cx + 1.2} ${cy - 1.2}`,
                stroke: series.ink,
                'stroke-width': 0.5,
                fill: 'none',
              }),
        )
        .join('');
    case 'line': {
      const stride = Math.max(1, Math.ceil(series.at.length / PATH_POINTS_MAX));
      const thin = series.at.filter((_, i) => i % stride === 0 || i === series.at.length - 1);
      const dashes = series.dashes === undefined ? {} : { 'stroke-dasharray': series.dashes };
      const d = pathData(thin.map(to), false);
      return element('path', { d, fill: 'none', stroke: series.ink, 'stroke-width': 0.35, ...dashes });
    }
    case 'bars':
      return series.at
        .map(([u, v]) => {
          const [x, y] = to([u - series.width / 2, v]);
          const [end] = to([u + series.width / 2, v]);
          const [, zero] = to([u, 0]);
          const height = Math.max(zero - y, 0);
          return element('rect', { x, y, width: Math.max(end - x - 0.1, 0.1), height, fill: series.ink });
        })
        .join('');
    case 'stretch': {
      const [x] = to([series.from, 0]);
      const [end] = to([series.to, 0]);
      const width = Math.max(end - x, 0.4);
      return shade(x, top, width, floor - top, series.word);
    }
    case 'shelf': {
      const [, low] = to([0, series.from]);
      const [, high] = to([0, series.to]);
      return shade(left, high, right - left, Math.max(low - high, 0.4), series.word);
    }
  }
}

function shade(x: number, y: number, width: number, height: number, word: string): string {
  const letters = { x: x + 0.6, y: y + 2.6, 'font-size': LETTER_MM.small, fill: INK.vermilion };
  return (
    element('rect', { x, y, width, height, fill: INK.vermilion, 'fill-opacity': 0.25 }) +
    element('text', letters, escaped(word))
  );
}
