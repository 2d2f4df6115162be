/** From one count to a higher one. */
export type Stretch = readonly [number, number];

/** A run of this many readings off the path is a spike, not a dead spot: one dirty contact. */
const SPIKE_READINGS_MAX = 2;
/** A wiper that has lost its track finds it again within half a second of slow motion (at a hundred readings a second). */
const LOST_READINGS_MAX = 200;
/** A jump over this share of the range that is gone on from is the track's end. */
const WRAP_SHARE = 0.6;
/** Where it is lost for long, it reads the same all the while: less than this share of a jump. */
const FLAT_SHARE = 0.25;

export interface Track {
  /** Indices of the readings on the path. */
  readonly sound: readonly number[];
  readonly lost: readonly Stretch[];
  readonly spikes: number;
  readonly wraps: boolean;
}

/** Goes along the readings: a jump that comes back is a spike or a dead spot, one that goes on is the end of the track. */
export function trackOf(counts: readonly number[], jump: number, width: number): Track {
  const sound: number[] = [];
  const lost: Stretch[] = [];
  const brief: { readonly at: Stretch; readonly readings: number }[] = [];
  let wraps = false;
  let at = 0;
  while (at < counts.length) {
    const last = sound.at(-1);
    const now = counts[at] as number;
    if (last === undefined || Math.abs(now - (counts[last] as number)) <= jump) {
      sound.push(at++);
      continue;
    }
    const from = counts[last] as number;
    const soon = Math.min(counts.length, at + LOST_READINGS_MAX);
    const flat = moved(counts, at, soon) <= FLAT_SHARE * jump;
    const back = returning(counts, at, flat ? counts.length : soon, from, jump);
    if (back === null) {
      if (Math.abs(now - from) >= WRAP_SHARE * width) wraps = true;
      sound.push(at++);
      continue;
    }
    if (moved(counts, at, back) > jump) wraps ||= Math.abs(now - from) >= WRAP_SHARE * width;
    else if (back - at <= SPIKE_READINGS_MAX)
      brief.push({ at: ordered(from, counts[back] as number), readings: back - at });
    else lost.push(ordered(from, counts[back] as number));
    at = back;
  }
  // A spike that comes again at the same place is a narrow dead spot.
  const again = (one: (typeof brief)[number]): boolean =>
    [...lost, ...brief.filter((other) => other !== one).map((other) => other.at)].some((spot) => overlap(spot, one.at));
  const spots = brief.filter(again).map(({ at: spot }) => spot);
  const spikes = brief.filter((one) => !again(one)).reduce((sum, { readings }) => sum + readings, 0);
  return { sound, lost: [...lost, ...spots], spikes, wraps };
}

/** The reading at which the path is taken up again near `from`; null where it is not before `end`. */
function returning(counts: readonly number[], at: number, end: number, from: number, jump: number): number | null {
  for (let i = at + 1; i < end; i++) {
    // The hand goes on while the wiper is lost.
    if (Math.abs((counts[i] as number) - from) <= 2 * jump) return i;
  }
  return null;
}

function moved(counts: readonly number[], from: number, to: number): number {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let i = from; i < to; i++) {
    low = Math.min(low, counts[i] as number);
    high = Math.max(high, counts[i] as number);
  }
  return high - low;
}

function ordered(a: number, b: number): Stretch {
  return a <= b ? [a, b] : [b, a];
}

export function overlap(a: Stretch, b: Stretch): boolean {
  return a[0] <= b[1] && b[0] <= a[1];
}

/** The same spot is met on each sweep; what all of them missed of it and what some did are one stretch. */
export function merged(stretches: readonly Stretch[]): readonly Stretch[] {
  const all: Stretch[] = [];
  for (const stretch of stretches.toSorted((a, b) => a[0] - b[0])) {
    const last = all.at(-1);
    if (last !== undefined && overlap(last, stretch)) all[all.length - 1] = [last[0], Math.max(last[1], stretch[1])];
    else all.push(stretch);
  }
  return all;
}
