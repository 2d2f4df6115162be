import { chain as makeChain, type Chain } from '../arm/chain.ts';
import type { ArmSpec } from '../arm/spec.ts';
import { US_PER_S } from '../clock/clock.ts';
import type { Work } from './derive.ts';
import { takeFault } from './fault.ts';
import type { Take } from './reader.ts';
import { resampled } from './resample.ts';
import type { Row } from './row.ts';
import { warp } from './warping.ts';

/** How two takes differ once the second is laid over the first in time; keys are the ones `--json` prints. */
export interface Comparison {
  readonly a: string;
  readonly b: string;
  readonly rate_hz: number;
  /** How far the second runs ahead (positive) or behind at worst, and how much longer it is. */
  readonly worst_shift_s: number;
  readonly length_ratio: number;
  readonly joints: readonly { readonly joint: string; readonly rms_deg: number; readonly worst_deg: number }[];
  /** Where both takes know the arm's geometry. */
  readonly tips: readonly { readonly arm: string; readonly rms_mm: number; readonly worst_mm: number }[];
}

const RATE_MAX_HZ = 100;
/** Samples of each take at most: the pairing's memory grows with their product. */
const SAMPLES_MAX = 6_000;
/** How far the two may run apart, as a share of the longer. */
const BAND = 0.25;
const DEG = 180 / Math.PI;
const MM = 1_000;

/** @param timed at the same instants, rather than laid over each other in time */
export function* compare(a: Take, b: Take, timed = false): Work<Comparison> {
  const tracks = commonTracks(a, b);
  if (tracks.length === 0) return takeFault('TAKE_UNFIT', b.name, `it has no joint in common with ${a.name}`);
  const longestS = Math.max(a.durationUs, b.durationUs) / US_PER_S;
  const rateHz = Math.min(RATE_MAX_HZ, SAMPLES_MAX / Math.max(longestS, 1e-3));
  const left = sampled(a, rateHz, tracks, 0);
  yield 0.3;
  const right = sampled(b, rateHz, tracks, 1);
  yield 0.6;
  const width = tracks.length;
  if (left.length < 2 * width || right.length < 2 * width)
    return takeFault(
      'TAKE_SHORT',
      left.length < 2 * width ? a.name : b.name,
      'nothing moves in it that could be compared',
    );

  // A demonstration is what the hand did: where both takes know that, followers only follow.
  const led = tracks.filter(({ follower }) => follower[0] < 0).length;
  const path = timed
    ? inStep(Math.min(left.length, right.length) / width)
    : warp(columnsOf(left, width, led), columnsOf(right, width, led), led === 0 ? width : led, BAND).path;
  yield 0.9;
  const squares = new Float64Array(width);
  const worst = new Float64Array(width);
  let shift = 0;
  const stretch = timed ? 1 : right.length / left.length;
  for (let k = 0; k < path.length; k += 2) {
    const i = path[k] as number;
    const j = path[k + 1] as number;
    const ahead = (j / stretch - i) / rateHz;
    if (Math.abs(ahead) > Math.abs(shift)) shift = ahead;
    for (let t = 0; t < width; t++) {
      const by = Math.abs((left[i * width + t] as number) - (right[j * width + t] as number));
      squares[t] = (squares[t] as number) + by * by;
      worst[t] = Math.max(worst[t] as number, by);
    }
  }
  const pairs = path.length / 2;
  return {
    a: a.name,
    b: b.name,
    rate_hz: rateHz,
    worst_shift_s: shift,
    length_ratio: b.durationUs / a.durationUs,
    joints: tracks.map(({ name }, t) => ({
      joint: name,
      rms_deg: Math.sqrt((squares[t] as number) / pairs) * DEG,
      worst_deg: (worst[t] as number) * DEG,
    })),
    tips: tipsOf(a, b, tracks, left, right, path),
  };
}

/** Each sample with the one of its own instant. */
function inStep(samples: number): Int32Array {
  return Int32Array.from({ length: 2 * samples }, (_, k) => k >> 1);
}

/** The first `count` columns of a table; all of them where that is none. */
function columnsOf(table: Float64Array, width: number, count: number): Float64Array {
  if (count === 0) return table;
  const out = new Float64Array((table.length / width) * count);
  for (let i = 0; i < out.length; i++) out[i] = table[Math.floor(i / count) * width + (i % count)] as number;
  return out;
}

/** A joint that both takes have; `of` reads it from a row of either. */
interface Track {
  readonly name: string;
  /** -1: the leader's. */
  readonly follower: readonly [number, number];
  readonly joint: readonly [number, number];
}

function commonTracks(a: Take, b: Take): readonly Track[] {
  const leader = a.header.leader.joints.flatMap((name, j): Track[] => {
    const other = b.header.leader.joints.indexOf(name);
    return other < 0 ? [] : [{ name: `leader.${name}`, follower: [-1, -1], joint: [j, other] }];
  });
  const followers = a.header.followers.flatMap((arm, f) => {
    const g = b.header.followers.findIndex(({ name }) => name === arm.name);
    return arm.joints.flatMap(({ name }, j): Track[] => {
      const other = b.header.followers[g]?.joints.findIndex((joint) => joint.name === name) ?? -1;
      return other < 0 ? [] : [{ name: `${arm.name}.${name}`, follower: [f, g], joint: [j, other] }];
    });
  });
  return [...leader, ...followers];
}

/** Rows of `tracks.length` angles, from where every one of them is known. */
function sampled(take: Take, rateHz: number, tracks: readonly Track[], side: 0 | 1): Float64Array {
  const width = tracks.length;
  const out = new Float64Array(width * (Math.floor((take.durationUs / US_PER_S) * rateHz) + 1));
  let at = 0;
  for (const row of resampled(take, rateHz)) {
    let isKnown = true;
    for (let t = 0; t < width; t++) {
      const value = valueOf(tracks[t] as Track, row, side);
      if (Number.isNaN(value)) isKnown = false;
      out[at + t] = value;
    }
    if (isKnown) at += width;
  }
  return out.subarray(0, at);
}

function valueOf({ follower, joint }: Track, row: Row, side: 0 | 1): number {
  const f = follower[side];
  const angles = f < 0 ? row.poseRad : row.followers[f]?.angleRad;
  return angles?.[joint[side]] ?? Number.NaN;
}

function tipsOf(
  a: Take,
  b: Take,
  tracks: readonly Track[],
  left: Float64Array,
  right: Float64Array,
  path: Int32Array,
): Comparison['tips'] {
  const width = tracks.length;
  const arms: { name: string; a: ArmSpec | null; b: ArmSpec | null; joints: readonly string[] }[] = [
    { name: 'leader', a: a.header.leader.arm, b: b.header.leader.arm, joints: a.header.leader.joints },
    ...a.header.followers.map((arm) => ({
      name: arm.name,
      a: arm.arm,
      b: b.header.followers.find(({ name }) => name === arm.name)?.arm ?? null,
      joints: arm.joints.map(({ name }) => name),
    })),
  ];
  return arms.flatMap((arm) => {
    const places = arm.joints.map((joint) => tracks.findIndex(({ name }) => name === `${arm.name}.${joint}`));
    if (arm.a === null || arm.b === null || places.includes(-1)) return [];
    const [first, second] = [makeChain(arm.a), makeChain(arm.b)];
    const angles = new Float64Array(places.length);
    const place = (chain: Chain, from: Float64Array, row: number): void => {
      for (let j = 0; j < places.length; j++) angles[j] = from[row * width + (places[j] as number)] as number;
      chain.pose(angles);
    };
    let squares = 0;
    let worst = 0;
    for (let k = 0; k < path.length; k += 2) {
      place(first, left, path[k] as number);
      place(second, right, path[k + 1] as number);
      const by = apart(first, second);
      squares += by * by;
      worst = Math.max(worst, by);
    }
    return [{ arm: arm.name, rms_mm: Math.sqrt(squares / (path.length / 2)) * MM, worst_mm: worst * MM }];
  });
}

function apart(a: Chain, b: Chain): number {
  const [i, j] = [3 * a.links, 3 * b.links];
  return Math.hypot(
    (a.at[i] as number) - (b.at[j] as number),
    (a.at[i + 1] as number) - (b.at[j + 1] as number),
    (a.at[i + 2] as number) - (b.at[j + 2] as number),
  );
}
