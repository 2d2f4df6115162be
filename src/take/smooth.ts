import { US_PER_S } from '../clock/clock.ts';
import { derive, type Derived, derivedHeader, type Work } from './derive.ts';
import { isTakeFault, takeFault } from './fault.ts';
import { butterworth, zeroPhase } from './low-pass.ts';
import type { Take } from './reader.ts';
import { resampled } from './resample.ts';
import { EVENT_CODES, type Row, type RowFollower } from './row.ts';

export interface Smoothed extends Derived {
  /** How far the smoothed take lies from the raw one, degrees. */
  readonly joints: readonly { readonly joint: string; readonly rms_deg: number; readonly worst_deg: number }[];
}

/** A take is filtered in stretches of this length, so that memory does not grow with it. */
const WINDOW_S = 300;
/** Each stretch begins and ends this many cutoff periods early and late: what the filter remembers has died away. */
const OVERLAP_PERIODS = 10;
/** Samples for each cutoff period, and the least rate. */
const OVERSAMPLING = 20;
const RATE_MIN_HZ = 100;
const DEG = 180 / Math.PI;

/** Filters poses and commands forward and backward, so that nothing comes later than it was. */
export function* smooth(folder: string, name: string, take: Take, cutoffHz: number): Work<Smoothed> {
  if (take.durationUs < US_PER_S / cutoffHz)
    return takeFault('TAKE_SHORT', take.name, `it is shorter than one period of ${cutoffHz} Hz`);
  const header = derivedHeader([take], 'smooth', { cutoff_hz: cutoffHz });
  const names = [
    ...header.leader.joints.map((joint) => `leader.${joint}`),
    ...header.followers.flatMap((arm) => arm.joints.map((joint) => `${arm.name}.${joint.name}`)),
  ];
  const errors = names.map(() => ({ squares: 0, worst: 0, count: 0 }));
  const made = yield* derive(folder, name, take, header, smoothed(take, cutoffHz, errors), take.rows);
  if (isTakeFault(made)) return made;
  return {
    ...made,
    joints: errors.map(({ squares, worst, count }, i) => ({
      joint: names[i] as string,
      rms_deg: count === 0 ? 0 : Math.sqrt(squares / count) * DEG,
      worst_deg: worst * DEG,
    })),
  };
}

interface Deviation {
  squares: number;
  worst: number;
  count: number;
}

function* smoothed(take: Take, cutoffHz: number, errors: readonly Deviation[]): Generator<Row> {
  const rateHz = Math.max(RATE_MIN_HZ, OVERSAMPLING * cutoffHz);
  const overlapUs = (OVERLAP_PERIODS / cutoffHz) * US_PER_S;
  for (let startUs = 0; startUs <= take.durationUs; startUs += WINDOW_S * US_PER_S) {
    const endUs = startUs + WINDOW_S * US_PER_S;
    const fromUs = Math.max(0, startUs - overlapUs);
    const filtered = filteredTracks(take, fromUs, Math.min(take.durationUs, endUs + overlapUs), rateHz, cutoffHz);
    for (const row of take.readFrom(startUs)) {
      if (row.tUs < startUs) continue;
      if (row.tUs >= endUs) break;
      put(row, filtered, ((row.tUs - fromUs) / US_PER_S) * rateHz, rateHz, errors);
      yield row;
    }
  }
}

/** One track a joint: the leader's, then the followers'. */
function filteredTracks(take: Take, fromUs: number, toUs: number, rateHz: number, cutoffHz: number): Float64Array[] {
  const count = Math.floor(((toUs - fromUs) / US_PER_S) * rateHz) + 1;
  const { leader, followers } = take.header;
  const joints = leader.joints.length + followers.reduce((sum, arm) => sum + arm.joints.length, 0);
  const tracks = Array.from({ length: joints }, () => new Float64Array(count));
  let k = 0;
  for (const row of resampled(take, rateHz, fromUs, toUs)) {
    let track = 0;
    for (const value of row.poseRad) (tracks[track++] as Float64Array)[k] = value;
    for (const arm of row.followers) for (const value of arm.angleRad) (tracks[track++] as Float64Array)[k] = value;
    k++;
  }
  const filter = butterworth(cutoffHz, rateHz);
  const padding = Math.round((3 * rateHz) / cutoffHz);
  for (const track of tracks) {
    // Before the first reading there is no pose: the first one stands for it.
    const known = track.findIndex((value) => !Number.isNaN(value));
    if (known < 0) continue;
    track.fill(track[known] as number, 0, known);
    zeroPhase(track, filter, padding);
  }
  return tracks;
}

function put(
  row: Row,
  tracks: readonly Float64Array[],
  place: number,
  rateHz: number,
  errors: readonly Deviation[],
): void {
  let t = 0;
  // What a converter read cannot be smoothed back into counts: a smoothed reading is a pose.
  if (row.event === EVENT_CODES.reading) {
    row.event = EVENT_CODES.pose;
    row.counts.fill(Number.NaN);
  }
  const isPose = row.event === EVENT_CODES.pose || row.event === EVENT_CODES.blend;
  for (let j = 0; j < row.poseRad.length; j++, t++) {
    const track = tracks[t] as Float64Array;
    if (Number.isNaN(row.poseRad[j])) continue;
    const value = valueAt(track, place);
    if (isPose) note(errors[t] as Deviation, value - (row.poseRad[j] as number));
    row.poseRad[j] = value;
  }
  for (const arm of row.followers as RowFollower[]) {
    for (let j = 0; j < arm.angleRad.length; j++, t++) {
      const track = tracks[t] as Float64Array;
      const value = valueAt(track, place);
      if (arm.commanded === 1) note(errors[t] as Deviation, value - (arm.angleRad[j] as number));
      arm.angleRad[j] = value;
      arm.targetRad[j] = value;
      arm.speedRadS[j] = (valueAt(track, place + 0.5) - valueAt(track, place - 0.5)) * rateHz;
    }
  }
}

function note(deviation: Deviation, by: number): void {
  deviation.squares += by * by;
  deviation.worst = Math.max(deviation.worst, Math.abs(by));
  deviation.count++;
}

function valueAt(track: Float64Array, place: number): number {
  const inside = Math.min(Math.max(place, 0), track.length - 1);
  const before = Math.floor(inside);
  const a = track[before] as number;
  const b = track[before + 1] ?? a;
  return a + (inside - before) * (b - a);
}
