import { resolve } from 'node:path';
import { stripSheet } from '../draw/strip-sheet.ts';
import { outputFile } from '../take/disk.ts';
import { takeNames, takesFolder, takeFile, writtenAt, freeBytes } from '../take/folder.ts';
import { diskFault, isTakeFault, type TakeFault, takeFault } from '../take/fault.ts';
import { openTake, type Take } from '../take/reader.ts';
import { limitWord, strips } from '../take/strips.ts';
import { type FollowerSummary, summarize, type TakeSummary } from '../take/summary.ts';
import { withTakes } from './take-files.ts';
import { refusedStatus, worked } from './take-work.ts';
import type { TakeWorld } from './take-world.ts';

export interface ListOptions {
  readonly takes: string | undefined;
  readonly json: boolean;
}

/** Lists the takes of the folder; resolves with the exit status. */
export async function listTakes({ takes, json }: ListOptions, world: TakeWorld): Promise<number> {
  const folder = takesFolder(takes, world.env);
  const listed = takeNames(folder).map((name) => {
    const place = takeFile(folder, name);
    const take = 'fault' in place ? place.fault : openTake(place.file);
    if (isTakeFault(take)) return { take: name, fault: take.code, detail: take.detail };
    take.close();
    return {
      take: name,
      rig: take.header.rig,
      made_by: take.header.made.by,
      parents: take.header.made.parents.map((parent) => parent.take),
      duration_s: take.durationUs / 1e6,
      rows: take.rows,
      bytes: take.bytes,
      marks: take.marks.length,
      whole: take.lostBytes === null,
      written: 'file' in place ? writtenAt(place.file) : null,
    };
  });
  if (json) {
    world.out.write(`${JSON.stringify({ folder, free_bytes: freeBytes(folder), takes: listed })}\n`);
    return 0;
  }
  if (listed.length === 0) world.err.write(`no takes in ${folder}; "eidograph run RIG --take NAME" records one\n`);
  const width = Math.max(4, ...listed.map(({ take }) => take.length));
  for (const one of listed) {
    if ('fault' in one) {
      world.out.write(`${one.take.padEnd(width)}  cannot be read: ${one.detail}\n`);
      continue;
    }
    const made = one.parents.length === 0 ? '' : `  ${one.made_by} of ${one.parents.join(' and ')}`;
    const facts = `${one.duration_s.toFixed(1).padStart(8)} s  ${`${one.rows}`.padStart(8)} rows  ${size(one.bytes).padStart(9)}`;
    const cut = one.whole ? '' : '  cut off';
    world.out.write(
      `${one.take.padEnd(width)}  ${facts}  ${one.rig}  ${one.marks} ${one.marks === 1 ? 'mark' : 'marks'}${made}${cut}\n`,
    );
  }
  return 0;
}

export interface ShowOptions extends ListOptions {
  /** Where its strips are drawn; undefined: nowhere. */
  readonly svg: string | undefined;
  /** Followers whose strips are drawn; empty: all of them. */
  readonly only: readonly string[];
}

/** Tells what a take holds, and draws it where that is asked for. */
export function showTake(name: string, options: ShowOptions, world: TakeWorld): Promise<number> {
  return withTakes(world, options.takes, [name], async ([take]) => {
    if (take === undefined) return 2;
    const shown = await worked(summarize(take), world);
    if ('status' in shown) return shown.status;
    world.out.write(options.json ? `${JSON.stringify(shown.done)}\n` : describe(shown.done));
    return options.svg === undefined ? 0 : drawStrips(take, options.svg, options.only, world);
  });
}

async function drawStrips(take: Take, svg: string, only: readonly string[], world: TakeWorld): Promise<number> {
  const known = take.header.followers.map(({ name }) => name);
  const strange = only.find((name) => !known.includes(name));
  if (strange !== undefined)
    return refusedStatus(
      takeFault('TAKE_COLUMN', take.name, `it has no follower ${strange}, only ${known.join(', ')}`),
      world.err,
    );
  const drawn = await worked(strips(take, only), world);
  if ('status' in drawn) return drawn.status;
  const fault = writeNew(resolve(svg), svg, stripSheet(drawn.done));
  if (fault !== null) return refusedStatus(fault, world.err);
  world.err.write(`${svg}: drawn\n`);
  return 0;
}

/** Writes a file whole, never over one that is there. */
function writeNew(file: string, name: string, text: string): TakeFault | null {
  const whole = outputFile(file, name);
  if ('code' in whole) return whole;
  try {
    whole.write(Buffer.from(text));
    return whole.keep();
  } catch (error) {
    return diskFault(name, error);
  } finally {
    whole.drop();
  }
}

function describe(summary: TakeSummary): string {
  const { leader, marks, parents } = summary;
  const made = parents.length === 0 ? 'recorded' : `${summary.made_by} of ${parents.join(' and ')}`;
  const head = [
    `${summary.take}: ${made} from ${summary.rig}, ${summary.duration_s.toFixed(2)} s, ${summary.rows} rows, ${size(summary.bytes)}`,
    ...(summary.damaged_rows > 0 ? [`  ${summary.damaged_rows} rows stand in damaged batches and are left out`] : []),
    ...(marks.length > 0 ? [`  marks: ${marks.map(({ mark, t_s }) => `${mark} ${t_s.toFixed(2)} s`).join(', ')}`] : []),
    `leader ${leader.leader}: ${leader.joints.join(', ')}`,
    `  ${leader.readings} readings, ${leader.dropouts.length} dropouts`,
    ...leader.dropouts.slice(0, SPANS_SHOWN).map(({ from_s, to_s }) => `  nothing ${span(from_s, to_s)}`),
  ];
  return `${[...head, ...summary.followers.flatMap(describeFollower)].join('\n')}\n`;
}

const SPANS_SHOWN = 3;
/** Shorter than this in all is not worth a word: it would be told as 0.0 s. */
const TOLD_S = 0.05;

function describeFollower(arm: FollowerSummary): readonly string[] {
  const smooth =
    arm.spectral_arc_length === null
      ? 'no movement'
      : `${arm.movements} movements, spectral arc length ${arm.spectral_arc_length.toFixed(2)}, log dimensionless jerk ${arm.log_dimensionless_jerk?.toFixed(2)}`;
  const blocked = durations(arm.blocked_s);
  return [
    `follower ${arm.follower}: ${arm.commands} commands; ${durations(arm.states)}`,
    `  ${smooth}`,
    ...(blocked === '' ? [] : [`  kept from following: ${blocked}`]),
    '    joint         least    most  peak deg/s   limit  deg/s2  limit',
    ...arm.joints.flatMap((joint) => [
      `    ${joint.joint.padEnd(12)} ${degrees(joint.least_deg)}  ${degrees(joint.most_deg)}  ${joint.speed_deg_s.toFixed(1).padStart(10)}   ${percent(joint.speed_share)}  ${joint.accel_deg_s2.toFixed(0).padStart(6)}  ${percent(joint.accel_share)}`,
      ...describeLimits(joint),
    ]),
  ];
}

/** One line for each limit that a joint met: for how long in all, and its first stretches. */
function describeLimits({ limited_s, limited }: FollowerSummary['joints'][number]): readonly string[] {
  return Object.entries(limited_s)
    .filter(([by]) => by !== 'deadband')
    .map(([by, seconds]) => {
      const spans = limited.filter((one) => one.by === by);
      const shown = spans.slice(0, SPANS_SHOWN).map(({ from_s, to_s }) => `${from_s.toFixed(2)}-${to_s.toFixed(2)}`);
      const more = spans.length > SPANS_SHOWN ? ' ...' : '';
      const what = by === 'range' ? 'clipped by its range' : `held back by ${limitWord(by)}`;
      const when = shown.length === 0 ? '' : `: ${shown.join(', ')}${more}`;
      return `      ${what} ${seconds.toFixed(2)} s${when}`;
    });
}

function durations(seconds: Readonly<Record<string, number>>): string {
  return Object.entries(seconds)
    .filter(([, s]) => s >= TOLD_S)
    .map(([word, s]) => `${word} ${s.toFixed(1)} s`)
    .join(', ');
}

function span(from: number, to: number): string {
  return `${from.toFixed(2)} to ${to.toFixed(2)} s`;
}

function degrees(value: number): string {
  return value.toFixed(1).padStart(6);
}

function percent(share: number): string {
  return `${(100 * share).toFixed(0)} %`.padStart(5);
}

export function size(bytes: number): string {
  return bytes < 1e6
    ? `${(bytes / 1e3).toFixed(0)} kB`
    : bytes < 1e9
      ? `${(bytes / 1e6).toFixed(1)} MB`
      : `${(bytes / 1e9).toFixed(1)} GB`;
}
