/**
 * How many times slower an arm that is `scale` times as long has to move to load its joints, and to look, like the small
 * one: the square root of the scale, by Froude's similitude (weight and inertia in the same proportion; W. Froude, 1872,
 * from memory). It is what makes a pendulum of four times the length swing half as fast.
 * @throws RangeError for a scale that is no positive number
 */
export function timeFactor(scale: number): number {
  if (!(scale > 0 && scale < Number.POSITIVE_INFINITY)) throw new RangeError(`scale ${scale}`);
  return Math.sqrt(scale);
}
