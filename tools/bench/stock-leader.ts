import { US_PER_S } from '../../src/clock/clock.ts';
import type { LeaderSpec } from '../../src/leader/spec.ts';
import { cobsDecode } from '../../src/wire/cobs.ts';
import { crc16 } from '../../src/wire/crc16.ts';
import { FRAME_BYTES_MAX, FROM_BOARD, READINGS_HEAD, u16 } from '../../src/wire/frames-layout.ts';

/** What flows down the leader's side; each stage adds its part to a copy. */
export interface LeaderFlow {
  readonly tUs: number;
  readonly counts: readonly number[];
  readonly windows: readonly (readonly number[])[];
  readonly angles: readonly number[];
  readonly health: readonly Health[];
  readonly filters: readonly Filter[];
  readonly poseRad: readonly number[];
}

interface Health {
  readonly sick: boolean;
  readonly suspect: boolean;
  readonly sinceUs: number | null;
  readonly lastUs: number;
  readonly jumpsUs: readonly number[];
  readonly angle: number;
  readonly tUs: number;
}

interface Filter {
  readonly value: number | null;
  readonly slope: number;
  readonly tUs: number;
}

type Reading = Pick<LeaderFlow, 'tUs' | 'counts'>;

export function leaderAtFirst(spec: LeaderSpec): LeaderFlow {
  const each = <T>(value: T): readonly T[] => spec.joints.map(() => value);
  const sound = { sick: true, suspect: true, sinceUs: null, lastUs: -Infinity, jumpsUs: [], angle: Number.NaN, tUs: 0 };
  return {
    tUs: 0,
    counts: [],
    windows: each([]),
    angles: [],
    health: each(sound),
    filters: each({ value: null, slope: 0, tUs: 0 }),
    poseRad: each(Number.NaN),
  };
}

/** A chunk of this bench is one whole frame. */
export function decoded({ bytes, tUs }: { readonly bytes: Uint8Array; readonly tUs: number }): Reading | null {
  const payload = new Uint8Array(FRAME_BYTES_MAX);
  const length = cobsDecode(bytes, bytes.indexOf(0), payload) - 2;
  if (length < READINGS_HEAD || payload[0] !== FROM_BOARD.readings) return null;
  if (crc16(payload, 0, length) !== u16(payload, length)) return null;
  const counts = Array.from({ length: (length - READINGS_HEAD) / 2 }, (_, i) => u16(payload, READINGS_HEAD + 2 * i));
  return { tUs, counts };
}

export function heardWhole(reading: Reading | null): reading is Reading {
  return reading !== null;
}

export function despiked(spec: LeaderSpec) {
  return (before: LeaderFlow, reading: Reading): LeaderFlow => {
    const windows = reading.counts.map((count, j) =>
      [...(before.windows[j] ?? []), count].slice(-(spec.joints[j]?.despike ?? 1)),
    );
    const counts = windows.map((window) => [...window].sort((a, b) => a - b)[(window.length - 1) >> 1] as number);
    return { ...before, tUs: reading.tUs, windows, counts };
  };
}

export function mapped(spec: LeaderSpec) {
  return (flow: LeaderFlow): LeaderFlow => ({
    ...flow,
    angles: flow.counts.map((count, j) => spec.joints[j]?.map.value(count) as number),
  });
}

export function judged(spec: LeaderSpec) {
  const judge = (was: Health, tUs: number, count: number, angle: number, j: number): Health => {
    const { travelMin, travelMax } = spec.joints[j] as LeaderSpec['joints'][number];
    const dtUs = Math.max(tUs - was.tUs, 5_000);
    const jumped = Math.abs(angle - was.angle) > ((1000 * Math.PI) / 180) * dtUs * 1e-6;
    const jumpsUs = (jumped ? [...was.jumpsUs, tUs] : was.jumpsUs).filter((at) => tUs - at <= US_PER_S).slice(-3);
    const slack = 0.05 * (travelMax - travelMin);
    const jumping = jumpsUs.length === 3;
    const atRail = count <= spec.countsMin || count >= spec.countsMax;
    const suspect = jumping || atRail || count < travelMin - slack || count > travelMax + slack;
    const sinceUs = suspect ? (was.sinceUs ?? tUs) : null;
    const lastUs = suspect ? tUs : was.lastUs;
    const fellSick = jumping || (sinceUs !== null && tUs - sinceUs >= 100_000);
    const healed = !suspect && tUs - lastUs >= US_PER_S;
    return { sick: healed ? false : fellSick || was.sick, suspect, sinceUs, lastUs, jumpsUs, angle, tUs };
  };
  return (before: LeaderFlow, flow: LeaderFlow): LeaderFlow => ({
    ...flow,
    health: before.health.map((was, j) => judge(was, flow.tUs, flow.counts[j] as number, flow.angles[j] as number, j)),
  });
}

export function smoothed(spec: LeaderSpec) {
  const share = (cutoffHz: number, rateHz: number): number => 1 / (1 + rateHz / (2 * Math.PI * cutoffHz));
  const filter = (was: Filter, tUs: number, angle: number, health: Health | undefined, j: number): Filter => {
    const smooth = spec.joints[j]?.smooth;
    if (health?.suspect) return { ...was, value: null };
    if (health?.sick) return was;
    if (!smooth || was.value === null) return { value: angle, slope: 0, tUs };
    const rate = US_PER_S / (tUs - was.tUs);
    const slope = was.slope + share(smooth.slopeCutoffHz, rate) * ((angle - was.value) * rate - was.slope);
    const cutoffHz = smooth.cutoffHz + smooth.betaHzPerRadS * Math.abs(slope);
    return { value: was.value + share(cutoffHz, rate) * (angle - was.value), slope, tUs };
  };
  return (before: LeaderFlow, flow: LeaderFlow): LeaderFlow => {
    const filters = before.filters.map((was, j) => filter(was, flow.tUs, flow.angles[j] as number, flow.health[j], j));
    const poseRad = filters.map((now, j) => now.value ?? (before.poseRad[j] as number));
    return { ...flow, filters, poseRad };
  };
}
