/** The day and time of the wall's clock, which steps and may be wrong: only for what people read. */
export interface Calendar {
  /** `2026-12-01`, local. */
  readonly date: string;
  /** `16-03-59`, local; it may stand in a file's name anywhere. */
  readonly time: string;
}

export function calendarNow(): Calendar {
  const now = new Date();
  const two = (value: number): string => String(value).padStart(2, '0');
  return {
    date: `${now.getFullYear()}-${two(now.getMonth() + 1)}-${two(now.getDate())}`,
    time: [now.getHours(), now.getMinutes(), now.getSeconds()].map(two).join('-'),
  };
}
