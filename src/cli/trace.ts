import { createReadStream, createWriteStream } from 'node:fs';
import type { Readable, Writable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import { Command } from '@commander-js/extra-typings';
import type { CommandUnknownOpts } from '@commander-js/extra-typings';
import type { Stamped } from '../bridge/source.ts';
import { type Trace, trace } from '../bridge/trace.ts';
import { US_PER_S } from '../clock/clock.ts';
import type { CompiledRig } from '../rig/compiled.ts';
import { commandsCsv } from './commands-csv.ts';
import { csvMistakeLine } from './csv-mistake.ts';
import { rigOrMistakes } from './load.ts';
import { MISTAKES_MAX, readingsCsv, type ReadingsCsv } from './readings-csv.ts';
import { startPoses } from './start-poses.ts';

/** Where a trace reads and writes, and speaks. */
export interface TraceWorld {
  /** Standard input, or null where somebody's keyboard is. */
  readonly stdin: Readable | null;
  readonly stdout: Writable;
  say(text: string): void;
}

export interface TraceOptions {
  readonly in: string | undefined;
  readonly out: string | undefined;
  readonly from: string | undefined;
}

const PORTION_CHARACTERS = 65_536;
/** A pause between readings is taken in steps, so that what it makes the arms do can leave. */
const STEP_US = 10 * US_PER_S;

/**
 * Readings in, commands out, in portions that wait until the last one has left.
 * @param csv afterwards it holds the mistakes, if there are any
 */
function tracing(
  rig: CompiledRig,
  from: readonly (Float64Array | null)[],
  input: AsyncIterable<string>,
  csv: ReadingsCsv,
): AsyncGenerator<string> {
  const pieces = async function* (): AsyncGenerator<Iterable<Stamped>> {
    for await (const text of input) {
      yield asEvents(csv.push(text));
      if (csv.hopeless) return;
    }
    yield asEvents(csv.end());
  };
  return traced(rig, from, pieces(), () => csv.mistakes.length === 0);
}

/** An event of its own for each: what is pushed may be stamped anew. */
function* asEvents(readings: Iterable<{ readonly tUs: number; readonly counts: Float64Array }>): Generator<Stamped> {
  for (const { tUs, counts } of readings) yield { kind: 'reading', tUs, counts };
}

async function* traced(
  rig: CompiledRig,
  from: readonly (Float64Array | null)[],
  pieces: AsyncIterable<Iterable<Stamped>> | Iterable<Iterable<Stamped>>,
  isSound: () => boolean,
): AsyncGenerator<string> {
  const commands = commandsCsv(rig);
  let run: Trace | null = null;
  let nowUs = 0;
  for await (const events of pieces) {
    for (const event of events) {
      const { tUs } = event;
      if (run === null) nowUs = tUs;
      run ??= trace(rig, from, tUs, commands.take);
      for (; tUs - nowUs > STEP_US; nowUs += STEP_US) {
        run.runTo(nowUs);
        if (commands.length > PORTION_CHARACTERS) yield commands.rows();
      }
      nowUs = tUs;
      run.push(event);
      if (commands.length > PORTION_CHARACTERS) yield commands.rows();
    }
  }
  if (isSound()) run?.end();
  // Of readings that were refused from the start there is nothing to show, not even a header.
  if (run !== null || isSound()) yield commands.rows();
}

/** Runs recorded readings through a rig's maps; resolves with the exit status. */
export async function traceFiles(file: string, options: TraceOptions, world: TraceWorld): Promise<number> {
  const loaded = rigOrMistakes(file, world.say);
  if (loaded === null) return 2;
  const { rig } = loaded;
  const poses = options.from === undefined ? { from: [] } : startPoses(rig, options.from);
  if ('mistakes' in poses) return refused(world, poses.mistakes);
  if (options.in === undefined && world.stdin === null)
    return refused(world, ['nothing to read; name a file with --in, or pipe readings in']);
  if (options.in?.endsWith('.arrows') === true) return traceTake(rig, poses.from, options.in, options.out, world);
  const named = options.in ?? '(standard input)';
  const input = options.in === undefined ? (world.stdin as Readable) : createReadStream(options.in);
  input.setEncoding('utf8');
  const output = options.out === undefined ? world.stdout : createWriteStream(options.out);
  const inputs = rig.boards.find(({ leads }) => leads)?.plan.inputs?.channels.length ?? 0;
  const csv = readingsCsv(rig.plan.leader, inputs);
  try {
    await pipeline(tracing(rig, poses.from, input, csv), output, { end: options.out !== undefined });
  } catch (fault) {
    return failed(fault as NodeJS.ErrnoException, world);
  }
  if (csv.mistakes.length === 0) return 0;
  const more = csv.mistakes.length >= MISTAKES_MAX ? ['and perhaps more; mend these first'] : [];
  return refused(world, [...csv.mistakes.map((mistake) => csvMistakeLine(named, mistake)), ...more]);
}

/** What moved the arms of a take, through the present profiles; a rig's input that the take does not have is silent. */
async function traceTake(
  rig: CompiledRig,
  from: readonly (Float64Array | null)[],
  file: string,
  out: string | undefined,
  world: TraceWorld,
): Promise<number> {
  const { openTake, takeSentence, tellingsOf } = await import('../take/readings.ts');
  const take = openTake(file);
  if ('code' in take) return refused(world, [takeSentence(take)]);
  const names = rig.boards.find(({ leads }) => leads)?.plan.inputs?.names ?? [];
  const told = tellingsOf(take, rig.plan, names);
  if ('code' in told) return refused(world, [takeSentence(told)]);
  const output = out === undefined ? world.stdout : createWriteStream(out);
  try {
    await pipeline(
      traced(rig, from, [told], () => true),
      output,
      { end: out !== undefined },
    );
    return 0;
  } catch (fault) {
    return failed(fault as NodeJS.ErrnoException, world);
  } finally {
    take.close();
  }
}

function refused({ say }: TraceWorld, lines: readonly string[]): 2 {
  say(lines.map((line) => `${line}\n`).join(''));
  return 2;
}

function failed(fault: NodeJS.ErrnoException, { say }: TraceWorld): number {
  // Whoever read the commands has seen enough.
  if (fault.code === 'EPIPE' || fault.code === 'ERR_STREAM_PREMATURE_CLOSE') return 0;
  if (fault.code === undefined) throw fault;
  say(`error: ${fault.message}\n`);
  return fault.syscall === 'open' ? 2 : 1;
}

const EXPLAINED = `
Readings are CSV with a header: t_ms, a column for each joint of the leader (and, if wanted, for its
buttons) in counts; an empty cell where no value came. An enable button without a column counts as
held down. Commands are CSV: t_ms,follower,state,joint,target_deg,angle_deg,pulse_us.

Nothing is opened and nothing moves. Followers start at rest and join at once. --from names a pose
of the profiles, or gives angles in degrees: shoulder=40,stork.elbow=-10.`;

/** `eidograph trace RIG` */
export function traceCommand(world: () => TraceWorld = realTraceWorld): CommandUnknownOpts {
  return new Command('trace')
    .description('push recorded readings through the maps of a rig, offline: CSV in, CSV out')
    .argument('<rig>', 'the rig file')
    .option('--in <file>', 'readings, or a take (.arrows); standard input when left out')
    .option('--out <file>', 'commands; standard output when left out')
    .option('--from <pose>', 'where followers start: a named pose, or joint=degrees with commas')
    .addHelpText('after', EXPLAINED)
    .action(async (file, { in: input, out, from }) => {
      process.exitCode = await traceFiles(file, { in: input, out, from }, world());
    });
}

function realTraceWorld(): TraceWorld {
  return {
    stdin: process.stdin.isTTY ? null : process.stdin,
    stdout: process.stdout,
    say: (text) => process.stderr.write(text),
  };
}
