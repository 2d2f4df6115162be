import { FAINT, INK, LETTER_MM } from './ink.ts';
import type { Point } from './contour.ts';
import { roundLength } from './paper-scale.ts';
import { element, escaped } from './svg.ts';

export type View = 'side' | 'plan';

/** A span of the world in one view, metres: u to the right, v up. */
export interface Window {
  readonly uMin: number;
  readonly uMax: number;
  readonly vMin: number;
  readonly vMax: number;
}

/** A place on the sheet, millimetres, y down. */
export interface Frame {
  readonly x: number;
  readonly y: number;
  readonly width: number;
  readonly height: number;
}

/** From a point of the world, metres, to the sheet, millimetres. */
export type ToPaper = (point: Point) => Point;

/** Faint lines at round lengths, numbered in millimetres along the frame. */
export function grid(seen: Window, { x, y, width, height }: Frame, to: ToPaper): string {
  const step = roundLength(Math.max(seen.uMax - seen.uMin, seen.vMax - seen.vMin) / 4);
  const parts: string[] = [];
  for (let k = Math.ceil(seen.uMin / step); k * step <= seen.uMax; k++) {
    const u = k * step;
    const [px] = to([u, 0]);
    parts.push(faintLine(px, y, px, y + height));
    if (px > x + 4 && px < x + width - 6)
      parts.push(label([px + 0.5, y + height - 0.8], millimetres(u), LETTER_MM.small, 'start', '#555555'));
  }
  for (let k = Math.ceil(seen.vMin / step); k * step <= seen.vMax; k++) {
    const v = k * step;
    const [, py] = to([0, v]);
    parts.push(faintLine(x, py, x + width, py));
    if (py > y + 7 && py < y + height - 4)
      parts.push(label([x + 0.8, py - 0.5], millimetres(v), LETTER_MM.small, 'start', '#555555'));
  }
  return parts.join('');
}

function faintLine(x1: number, y1: number, x2: number, y2: number): string {
  return element('line', { x1, y1, x2, y2, stroke: FAINT, 'stroke-width': 0.12 });
}

function millimetres(metres: number): string {
  return String(Number((1000 * metres).toPrecision(6)));
}

/** A bar of a round length, in the upper right corner. */
export function scaleBar({ x, y, width }: Frame, perM: number): string {
  const lengthM = roundLength((0.35 * width) / perM);
  const length = lengthM * perM;
  const left = x + width - length - 8;
  const top = y + 3;
  const halves = [INK.black, '#FFFFFF'].map((fill, i) =>
    element('rect', {
      x: left + (i * length) / 2,
      y: top,
      width: length / 2,
      height: 1.2,
      fill,
      stroke: INK.black,
      'stroke-width': 0.2,
    }),
  );
  return `${halves.join('')}${label([left, top + 4], '0', LETTER_MM.small, 'middle', INK.black)}${label(
    [left + length, top + 4],
    `${millimetres(lengthM)} mm`,
    LETTER_MM.small,
    'middle',
    INK.black,
  )}`;
}

/** Words with a white rim, so that they can be read on any line. */
export function label(at: Point, text: string, size: number, anchor: 'start' | 'middle' | 'end', fill: string): string {
  const rim = { stroke: '#FFFFFF', 'stroke-width': 0.5, 'paint-order': 'stroke', 'stroke-linejoin': 'round' };
  return element('text', { x: at[0], y: at[1], 'font-size': size, 'text-anchor': anchor, fill, ...rim }, escaped(text));
}
