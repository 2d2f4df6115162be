/** Numbers as they stand in a report; what is not known is a dash. */

export const DASH = '–';

export function fixed(value: number | null, decimals: number): string {
  if (value === null) return DASH;
  const text = value.toFixed(decimals);
  // A rounded nothing has no sign.
  return Number(text) === 0 ? text.replace('-', '') : text;
}

export function percent(share: number | null): string {
  return share === null ? DASH : `${fixed(100 * share, 0)} %`;
}

/** Three significant digits at most, without an exponent: 0.0123, 1.23, 123, 12300. */
export function brief(value: number | null): string {
  if (value === null) return DASH;
  if (value === 0) return '0';
  const decimals = Math.min(4, Math.max(0, 2 - Math.floor(Math.log10(Math.abs(value)))));
  return fixed(value, decimals);
}
