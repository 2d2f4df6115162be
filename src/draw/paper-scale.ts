/** Steps of a decade: 1, 2 and 5 as ISO 5455 recommends (from memory), and 2.5, because stages are drawn at 1:25 (common practice). */
const STEPS = [1, 2, 2.5, 5] as const;
/** A city at this scale fits a thumbnail: nothing here goes further. */
const DECADES = 9;

/** The largest scale 1:n at which a length fits the paper; both in metres, so that n is a plain number. */
export function paperScale(lengthM: number, paperM: number): number {
  for (let decade = -DECADES; decade <= DECADES; decade++) {
    for (const step of STEPS) {
      const n = step * 10 ** decade;
      if (lengthM / n <= paperM) return n;
    }
  }
  throw new RangeError(`${lengthM} m is nothing that is drawn`);
}

/** `1:20`, and `10:1` for what is drawn larger than it is. */
export function scaleText(n: number): string {
  return n >= 1 ? `1:${n}` : `${Number((1 / n).toPrecision(2))}:1`;
}

/** A round length, 1, 2 or 5 times a power of ten, that is at most `longest`. */
export function roundLength(longest: number): number {
  const decade = 10 ** Math.floor(Math.log10(longest));
  const step = [5, 2, 1].find((one) => one * decade <= longest) ?? 1;
  return step * decade;
}
