import { STATES } from '../follower/states.ts';
import { BLOCKS, LIMITS } from '../follower/reasons.ts';
import { takeFault, type TakeFault } from './fault.ts';
import type { TakeHeader } from './header.ts';
import type { Take } from './reader.ts';
import { ROW_EVENTS, ROW_KEYS, type Row, type RowFollower } from './row.ts';

/** A column of an export: one value of a row, in the units of files. */
export type TableColumn =
  | { readonly name: string; readonly kind: 'number' | 'integer'; of(row: Row): number }
  | { readonly name: string; readonly kind: 'text'; of(row: Row): string };

const DEG = 180 / Math.PI;

/** Every column that a take can give, in order. A number that is not known is NaN. */
function tableColumns(header: TakeHeader): readonly TableColumn[] {
  const { leader, followers } = header;
  return [
    integer('t_us', (row) => row.tUs),
    text('event', (row) => ROW_EVENTS[row.event] ?? ''),
    text('key', (row) => ROW_KEYS[row.key] ?? ''),
    text('follower', (row) => nameOf(header, row.follower)),
    number('value', (row) => row.value),
    text('name', (row) => row.name),
    ...leader.inputs.map((name, i) => number(`leader.${name}.counts`, (row) => row.counts[i] as number)),
    ...leader.joints.map((name, j) => number(`leader.${name}.pose_deg`, (row) => (row.poseRad[j] as number) * DEG)),
    ...followers.flatMap(({ name, joints }, f) => {
      const arm = (row: Row): RowFollower => row.followers[f] as RowFollower;
      return [
        integer(`${name}.commanded`, (row) => arm(row).commanded),
        text(`${name}.state`, (row) => STATES[arm(row).state] ?? ''),
        text(`${name}.blocked_by`, (row) => words(BLOCKS, arm(row).blocks)),
        ...joints.flatMap(({ name: joint }, j) => [
          number(`${name}.${joint}.target_deg`, (row) => (arm(row).targetRad[j] as number) * DEG),
          number(`${name}.${joint}.angle_deg`, (row) => (arm(row).angleRad[j] as number) * DEG),
          number(`${name}.${joint}.speed_deg_s`, (row) => (arm(row).speedRadS[j] as number) * DEG),
          text(`${name}.${joint}.limited_by`, (row) => words(LIMITS, arm(row).limits[j] as number)),
        ]),
      ];
    }),
  ];
}

/**
 * The columns that patterns such as `t_us`, `wren.*` or `*.angle_deg` choose, in the take's order.
 * @param patterns none: all of them
 */
export function chosenColumns(take: Take, patterns: readonly string[]): readonly TableColumn[] | TakeFault {
  const all = tableColumns(take.header);
  if (patterns.length === 0) return all;
  const tests = patterns.map((pattern) => ({ pattern, test: globOf(pattern) }));
  const idle = tests.find(({ test }) => !all.some(({ name }) => test.test(name)));
  if (idle !== undefined) return takeFault('TAKE_COLUMN', take.name, `it has no column "${idle.pattern}"`);
  return all.filter(({ name }) => tests.some(({ test }) => test.test(name)));
}

function globOf(pattern: string): RegExp {
  const escaped = pattern.replace(/[.+?^${}()|[\]\\]/g, '\\$&').replaceAll('*', '.*');
  return new RegExp(`^${escaped}$`);
}

function nameOf({ followers }: TakeHeader, index: number): string {
  return index === -1 ? 'all' : index === -2 ? 'leader' : (followers[index]?.name ?? '');
}

const WORDS = new Map<object, string[]>();

/** Each combination of bits is put into words once. */
function words(bits: Readonly<Record<string, number>>, value: number): string {
  const known = WORDS.get(bits) ?? [];
  WORDS.set(bits, known);
  return (known[value] ??= Object.keys(bits)
    .filter((name) => (value & (bits[name] as number)) !== 0)
    .join(' '));
}

function number(name: string, of: (row: Row) => number): TableColumn {
  return { name, kind: 'number', of };
}

function integer(name: string, of: (row: Row) => number): TableColumn {
  return { name, kind: 'integer', of };
}

function text(name: string, of: (row: Row) => string): TableColumn {
  return { name, kind: 'text', of };
}
