import { chain } from '../arm/chain.ts';
import {
  envelopeShape,
  floorLine,
  footprintShape,
  keepOutShape,
  poseShape,
  standShape,
  weightsOf,
} from './arm-shapes.ts';
import type { DrawnArm } from './arm-shapes.ts';
import type { Point } from './contour.ts';
import type { Envelope, Envelopes } from './envelope.ts';
import { INK, LETTER_MM } from './ink.ts';
import { grid, label, scaleBar } from './paper.ts';
import type { Frame, View, Window } from './paper.ts';
import { element } from './svg.ts';

/** Paper around what is drawn, for labels. */
const ROOM_MM = 6;
/** What is farther below the arm than this share of its size is left out: drawn, it would make the arm tiny. */
const BELOW_SHARE = 0.8;

/** What of the world a view has to show. */
export function windowOf(view: View, { arm, keepOut, poses }: DrawnArm, envelopes: Envelopes): Window {
  const vAxis = view === 'side' ? 2 : 1;
  const points: Point[] = [[0, view === 'side' ? arm.base.heightM : 0], ...envelopes[view].flat()];
  const poser = chain(arm);
  for (const [k, { anglesRad }] of poses.entries()) {
    poser.pose(anglesRad);
    // Weights are drawn where the first pose has them.
    if (k === 0) for (const { atM } of weightsOf(poser)) points.push([atM[0], atM[vAxis]]);
    for (let i = 0; i <= poser.links; i++) points.push([poser.at[3 * i] as number, poser.at[3 * i + vAxis] as number]);
  }
  const reached = bounds(points);
  const size = Math.max(reached.uMax - reached.uMin, reached.vMax - reached.vMin);
  const isNear = (z: number): boolean => z >= reached.vMin - BELOW_SHARE * size;
  if (view === 'plan') points.push(...(arm.base.footprintM ?? []));
  else if (isNear(0)) points.push([0, 0], ...(arm.base.footprintM ?? []).map(([x]): Point => [x, 0]));
  // Of a keep-out, only what lies near the arm matters.
  const near = grown(reached, 0.1 * size);
  for (const place of keepOut) {
    if (place.kind === 'below') {
      if (view === 'side' && isNear(place.zM)) points.push([0, place.zM]);
      continue;
    }
    for (const corner of [place.minM, place.maxM]) {
      points.push([clamp(corner[0], near.uMin, near.uMax), clamp(corner[vAxis], near.vMin, near.vMax)]);
    }
  }
  return bounds(points);
}

/** Paper that a window takes at 1:n, millimetres. */
export function paperOf(
  { uMin, uMax, vMin, vMax }: Window,
  n: number,
): { readonly width: number; readonly height: number } {
  return { width: (1000 * (uMax - uMin)) / n + 2 * ROOM_MM, height: (1000 * (vMax - vMin)) / n + 2 * ROOM_MM };
}

/** One view to the scale 1:n, in the middle of its frame; an SVG group. */
export function elevation(
  view: View,
  drawn: DrawnArm,
  envelope: Envelope,
  window: Window,
  frame: Frame,
  n: number,
): string {
  const { x, y, width, height } = frame;
  const perM = 1000 / n;
  const left = x + (width - perM * (window.uMax - window.uMin)) / 2;
  // A floor stands near the bottom, whatever room is left above.
  const bottom =
    view === 'side' && window.vMin <= 0
      ? y + height - ROOM_MM - 3
      : y + (height + perM * (window.vMax - window.vMin)) / 2;
  const to = ([u, v]: Point): Point => [left + (u - window.uMin) * perM, bottom - (v - window.vMin) * perM];
  const seen: Window = {
    uMin: window.uMin + (x - left) / perM,
    uMax: window.uMin + (x + width - left) / perM,
    vMin: window.vMin - (y + height - bottom) / perM,
    vMax: window.vMin + (bottom - y) / perM,
  };
  const id = `clip-${Math.round(x)}-${Math.round(y)}`;
  const poser = chain(drawn.arm);
  return element(
    'g',
    {},
    element('clipPath', { id }, element('rect', { x, y, width, height })),
    element(
      'g',
      { 'clip-path': `url(#${id})` },
      grid(seen, frame, to),
      ...drawn.keepOut.map((place) => keepOutShape(view, place, seen, to)),
      envelopeShape(envelope, to),
      view === 'side' ? floorLine(seen, to) : footprintShape(drawn.arm, to),
      standShape(view, drawn.arm, seen, to),
      ...drawn.poses.map((pose, i) => poseShape(view, poser, pose, i, frame, to)),
    ),
    element('rect', { x, y, width, height, fill: 'none', stroke: INK.black, 'stroke-width': 0.25 }),
    label(
      [x + 1.5, y + 4],
      `${view === 'side' ? 'from the side' : 'from above'}, forward →`,
      LETTER_MM.text,
      'start',
      INK.black,
    ),
    scaleBar(frame, perM),
  );
}

function bounds(points: readonly Point[]): Window {
  const us = points.map(([u]) => u);
  const vs = points.map(([, v]) => v);
  return { uMin: Math.min(...us), uMax: Math.max(...us), vMin: Math.min(...vs), vMax: Math.max(...vs) };
}

function grown({ uMin, uMax, vMin, vMax }: Window, by: number): Window {
  return { uMin: uMin - by, uMax: uMax + by, vMin: vMin - by, vMax: vMax + by };
}

function clamp(value: number, low: number, high: number): number {
  return Math.max(low, Math.min(high, value));
}
