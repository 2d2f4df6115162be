import type { MistakeCase } from './case.ts';

const ARM = 'arm: { links: [{ joint: shoulder, axis: y, to_mm: [0, 0, 40], motor: { stall_nm: 1 } }] }';
/** What is said of a limit until something keeps it. */
export const notEnforced = (line: number, column: number, key: string, what: string): string =>
  `RIG_NOT_ENFORCED stork.yaml:${line}:${column}: ${key}: ${what} is not yet enforced by this version; ${REMEDY}`;

const REMEDY = 'remove it, and keep the speed down with speed_deg_s';

/** Limits that nothing keeps yet. */
export const NOT_ENFORCED_CASES: readonly MistakeCase[] = [
  ['follow: tip', 'follow', 9, 'follow: tip'],
  ['tip_speed_mm_s: 250', 'tip_speed_mm_s', 17, 'tip_speed_mm_s'],
  ['keep_out: [{ below_mm: -100 }]', 'keep_out', 11, 'keep_out'],
  ['load: limit', 'load', 7, 'load: limit'],
  ['moving_load: limit', 'moving_load', 14, 'moving_load: limit'],
].map(([line, key, column, what]) => ({
  title: String(line),
  rig: [['  buttons:', '  arm: { links: [{ joint: shoulder, axis: y, to_mm: [0, 0, 40] }] }\n  buttons:']],
  stork: [
    ['rate_hz: 50', String(line)],
    ['poses:', `${ARM}\nposes:`],
  ],
  says: [notEnforced(4, Number(column), String(key), String(what))],
}));
