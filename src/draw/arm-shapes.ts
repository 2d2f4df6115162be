import { baseTurn, rowTimes } from '../arm/chain.ts';
import type { Chain } from '../arm/chain.ts';
import type { JointRange } from '../arm/reaching.ts';
import type { ArmSpec, KeepOut, Vec3 } from '../arm/spec.ts';
import type { Point } from './contour.ts';
import type { Envelope } from './envelope.ts';
import { INK, LETTER_MM } from './ink.ts';
import { label } from './paper.ts';
import type { Frame, ToPaper, View, Window } from './paper.ts';
import { element, pathData } from './svg.ts';

/** An arm as it is drawn: where it stands, how it can turn, and the poses that matter. */
export interface DrawnArm {
  readonly arm: ArmSpec;
  /** One a joint of the profile. */
  readonly ranges: readonly JointRange[];
  readonly keepOut: readonly KeepOut[];
  readonly poses: readonly DrawnPose[];
}

export interface DrawnPose {
  /** What stands beside the tip: `rest`, `worst for the shoulder`. */
  readonly label: string;
  readonly anglesRad: Float64Array;
}

/** Lines of the poses, in their order: they differ in colour, dashes and joints. */
const POSE_LINES = [
  { stroke: INK.black, dashes: 'none', joints: INK.black },
  { stroke: INK.vermilion, dashes: '2.4 1.2', joints: '#FFFFFF' },
  { stroke: INK.blue, dashes: '0.6 1', joints: '#FFFFFF' },
] as const;

const JOINT_MM = 0.9;
const WEIGHT_MM = 1.5;

export function envelopeShape(envelope: Envelope, to: ToPaper): string {
  if (envelope.length === 0) return '';
  const d = envelope.map((ring) => pathData(ring.map(to), true)).join('');
  const dashes = { stroke: INK.blue, 'stroke-width': 0.3, 'stroke-dasharray': '3 0.8 0.6 0.8' };
  return element('path', { d, fill: INK.sky, 'fill-opacity': 0.22, 'fill-rule': 'evenodd', ...dashes });
}

/** A hatched place with its word. */
export function keepOutShape(view: View, place: KeepOut, seen: Window, to: ToPaper): string {
  const vAxis = view === 'side' ? 2 : 1;
  if (place.kind === 'below' && view === 'plan') return '';
  const corners: readonly [Point, Point] =
    place.kind === 'below'
      ? [
          [seen.uMin, seen.vMin],
          [seen.uMax, place.zM],
        ]
      : [
          [place.minM[0], place.minM[vAxis]],
          [place.maxM[0], place.maxM[vAxis]],
        ];
  const [x, bottom] = to(corners[0]);
  const [right, y] = to(corners[1]);
  if (right <= x || bottom <= y) return '';
  const edge = { stroke: INK.vermilion, 'stroke-width': 0.4, 'stroke-dasharray': '1.2 0.8' };
  const box = element('rect', { x, y, width: right - x, height: bottom - y, fill: 'url(#keep-out)', ...edge });
  const words: Point = place.kind === 'below' ? [x + 12, y + 3] : [x + 1, bottom - 1];
  return `${box}${label(words, 'keep-out', LETTER_MM.small, 'start', INK.vermilion)}`;
}

export function floorLine(seen: Window, to: ToPaper): string {
  if (seen.vMin > 0) return '';
  const [x1, y] = to([seen.uMin, 0]);
  const [x2] = to([seen.uMax, 0]);
  const line = element('line', { x1, y1: y, x2, y2: y, stroke: INK.black, 'stroke-width': 0.5 });
  return `${line}${label([x2 - 1.5, y + 3], 'floor', LETTER_MM.small, 'end', INK.black)}`;
}

export function footprintShape({ base }: ArmSpec, to: ToPaper): string {
  if (base.footprintM === null) return '';
  const d = pathData(base.footprintM.map(to), true);
  return element('path', {
    d,
    fill: 'none',
    stroke: INK.green,
    'stroke-width': 0.45,
    'stroke-dasharray': '1.6 0.5 0.4 0.5 0.4 0.5',
  });
}

/** What the first axis is held by: a hatched plate behind it, square to the base's own z, and a column where it stands on the floor. */
export function standShape(view: View, { base }: ArmSpec, seen: Window, to: ToPaper): string {
  const turn = baseTurn(base.tiltRad);
  const up: Point = [turn[2] as number, turn[view === 'side' ? 8 : 5] as number];
  const at = to([0, view === 'side' ? base.heightM : 0]);
  const length = Math.hypot(up[0], up[1]);
  // Seen along the base's z, the plate has no side.
  if (length < 0.3) return '';
  const [dx, dy] = [up[0] / length, -up[1] / length];
  const stands = view === 'side' && dy < -0.9 && base.footprintM !== null && seen.vMin <= 0;
  const parts: string[] = [];
  if (stands) {
    const feet = base.footprintM?.map(([x]) => x) ?? [0];
    const [x1] = to([Math.min(...feet), 0]);
    const [x2, y] = to([Math.max(...feet), 0]);
    parts.push(element('line', { x1: at[0], y1: at[1], x2: at[0], y2: y, stroke: INK.black, 'stroke-width': 1.2 }));
    parts.push(element('line', { x1, y1: y, x2, y2: y, stroke: INK.green, 'stroke-width': 1.2 }));
    return parts.join('');
  }
  const half = 4;
  const [ax, ay] = [at[0] - 1.2 * dx, at[1] - 1.2 * dy];
  parts.push(
    element('line', {
      x1: ax + half * dy,
      y1: ay - half * dx,
      x2: ax - half * dy,
      y2: ay + half * dx,
      stroke: INK.black,
      'stroke-width': 0.7,
    }),
  );
  for (let k = -half; k < half; k += 1.6) {
    const [px, py] = [ax + k * dy, ay - k * dx];
    parts.push(
      element('line', {
        x1: px,
        y1: py,
        x2: px - 1.6 * dx + 1.2 * dy,
        y2: py - 1.6 * dy - 1.2 * dx,
        stroke: INK.black,
        'stroke-width': 0.25,
      }),
    );
  }
  return parts.join('');
}

export function poseShape(
  view: View,
  poser: Chain,
  { label: text, anglesRad }: DrawnPose,
  i: number,
  frame: Frame,
  to: ToPaper,
): string {
  const line = POSE_LINES[i % POSE_LINES.length] as (typeof POSE_LINES)[number];
  const vAxis = view === 'side' ? 2 : 1;
  poser.pose(anglesRad);
  const ends: Point[] = [];
  for (let k = 0; k <= poser.links; k++) ends.push(to([poser.at[3 * k] as number, poser.at[3 * k + vAxis] as number]));
  const tip = ends.at(-1) as Point;
  const before = ends.at(-2) as Point;
  const stroke = {
    stroke: line.stroke,
    'stroke-width': 0.8,
    'stroke-dasharray': line.dashes,
    'stroke-linejoin': 'round',
  };
  const joints = ends
    .slice(0, -1)
    .map(([cx, cy]) =>
      element('circle', { cx, cy, r: JOINT_MM, fill: line.joints, stroke: line.stroke, 'stroke-width': 0.3 }),
    );
  // Words run toward the middle where the frame ends, and above or below the arm as it points.
  const leftward = tip[0] > frame.x + 0.65 * frame.width;
  const above = view === 'side' ? tip[1] < before[1] : i === 0;
  const beside: Point = [tip[0] + (leftward ? -1.6 : 1.6), tip[1] + (above ? -1 : 3)];
  return element(
    'g',
    {},
    element('path', { d: pathData(ends, false), fill: 'none', ...stroke }),
    ...joints,
    element('rect', { x: tip[0] - 0.7, y: tip[1] - 0.7, width: 1.4, height: 1.4, fill: line.stroke }),
    ...(i === 0 ? weightsOf(poser).map((weight) => weightShape(weight, vAxis, to)) : []),
    label(beside, text, LETTER_MM.small, leftward ? 'end' : 'start', line.stroke),
  );
}

/** A counterweight at the chain's present pose: where its joint's axis is, where it is, and how heavy. */
export interface DrawnWeight {
  readonly axisM: Vec3;
  readonly atM: Vec3;
  readonly massKg: number;
}

export function weightsOf({ spec, at, turn }: Chain): readonly DrawnWeight[] {
  return spec.links.flatMap(({ counterweight }, i) => {
    if (counterweight === null) return [];
    const axisM: Vec3 = [at[3 * i] as number, at[3 * i + 1] as number, at[3 * i + 2] as number];
    const local = Float64Array.from(counterweight.atM);
    const atM: Vec3 = [
      axisM[0] + rowTimes(turn, 9 * i, local, 0),
      axisM[1] + rowTimes(turn, 9 * i + 3, local, 0),
      axisM[2] + rowTimes(turn, 9 * i + 6, local, 0),
    ];
    return [{ axisM, atM, massKg: counterweight.massKg }];
  });
}

function weightShape({ axisM, atM, massKg }: DrawnWeight, vAxis: 1 | 2, to: ToPaper): string {
  const from = to([axisM[0], axisM[vAxis]]);
  const [cx, cy] = to([atM[0], atM[vAxis]]);
  const grams = `${Number((1000 * massKg).toPrecision(4))} g`;
  return element(
    'g',
    {},
    element('path', { d: pathData([from, [cx, cy]], false), fill: 'none', stroke: INK.orange, 'stroke-width': 0.5 }),
    element('circle', { cx, cy, r: WEIGHT_MM, fill: INK.orange, stroke: INK.black, 'stroke-width': 0.25 }),
    // From above, one stands on the other.
    vAxis === 2 ? label([cx + 2.2, cy + 0.8], grams, LETTER_MM.small, 'start', INK.black) : '',
  );
}
