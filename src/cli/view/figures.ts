/** Numbers as the view and the plain lines print them. */

/** `+12.3`, always six columns: no arm's range goes past three digits. */
export function degrees(deg: number | null): string {
  if (deg === null) return '   –  ';
  // Minus zero is a zero.
  const rounded = Math.round(deg * 10) / 10 + 0;
  return `${rounded < 0 ? '-' : '+'}${Math.abs(rounded).toFixed(1)}`.padStart(6);
}

export function milliseconds(us: number | null): string {
  return us === null ? '–' : `${(us / 1_000).toFixed(us < 100_000 ? 1 : 0)} ms`;
}

export function seconds(us: number): string {
  return `${(us / 1_000_000).toFixed(1)} s`;
}

export function percent(share: number): string {
  return `${Number((share * 100).toFixed(1))} %`;
}

/** How fresh the leader's readings are. */
export function contact(readingAgeUs: number | null): string {
  if (readingAgeUs === null) return 'no reading';
  return readingAgeUs < 1_000_000
    ? `reading ${Math.round(readingAgeUs / 1_000)} ms old`
    : `reading ${seconds(readingAgeUs)} old`;
}
