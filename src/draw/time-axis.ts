/** Steps of a time axis, seconds: as clocks divide time. */
const STEPS_S = [
  0.001, 0.002, 0.005, 0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1, 2, 5, 10, 15, 30, 60, 120, 300, 600, 900, 1_800, 3_600,
  7_200, 14_400, 21_600, 43_200, 86_400,
] as const;
const TICKS_MAX = 13;

/** Round instants from 0 on, at most thirteen of them. */
export function timeTicks(durationS: number): readonly number[] {
  const longest = STEPS_S.at(-1) as number;
  const step =
    STEPS_S.find((one) => durationS / one < TICKS_MAX) ?? longest * Math.ceil(durationS / longest / (TICKS_MAX - 1));
  return Array.from({ length: Math.floor(durationS / step + 1e-9) + 1 }, (_, i) => i * step);
}

/** `2.5 s` under a minute, then `1:30`, then `2:05:00`. */
export function timeText(s: number): string {
  if (s < 60) return `${Number(s.toFixed(3))} s`;
  const whole = Math.round(s);
  const two = (value: number): string => String(value).padStart(2, '0');
  const minutes = Math.floor(whole / 60);
  return minutes < 60
    ? `${minutes}:${two(whole % 60)}`
    : `${Math.floor(minutes / 60)}:${two(minutes % 60)}:${two(whole % 60)}`;
}
