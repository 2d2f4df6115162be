import { resolve } from 'node:path';
import { Command, Option } from '@commander-js/extra-typings';
import type { CommandUnknownOpts } from '@commander-js/extra-typings';
import { LOG_LEVELS, type LogLevel } from '../bridge/log.ts';
import { withFollowers } from '../bridge/selection.ts';
import { wakeMemory, wakeMemoryFile } from '../bridge/wake-memory.ts';
import { CAUTIONS } from '../bridge/words.ts';
import type { CompiledRig } from '../rig/compiled.ts';
import type { LoadedRig } from '../rig/load.ts';
import { takesFolder } from '../take/folder.ts';
import type { Companion } from './companion.ts';
import { driving } from './driving.ts';
import { rigOrMistakes } from './load.ts';
import { chosenFollowers, durationOption, logLevelOption, marksOption, namesOption, paceOption } from './options.ts';
import { portOf } from './port-of.ts';
import { realWorld, type World } from './world.ts';

export interface RunOptions {
  readonly join: boolean;
  readonly pace: number | undefined;
  readonly only: readonly string[] | undefined;
  readonly without: readonly string[] | undefined;
  readonly dry: boolean;
  readonly for: number | undefined;
  readonly json: boolean;
  readonly log: LogLevel;
  readonly logFile: string | undefined;
  /** Makes the recording that goes along; absent: none can. */
  readonly record?: MakeRecording;
}

const NEEDS_JOIN = 'there is no terminal to ask for the go; say --join to let the arms start without asking, or --dry';

/** Drives the rig of a file; resolves with the exit status. */
export async function run(file: string, options: RunOptions, world: World): Promise<number> {
  const { err, clock, env, terminal } = world;
  const loaded = rigOrMistakes(file, err.write);
  if (loaded === null) return 2;
  const chosen = chosenRig(loaded.rig, options);
  if ('mistakes' in chosen) {
    err.write(chosen.mistakes.map((text) => `error: ${text}\n`).join(''));
    return 2;
  }
  const attended = terminal !== null && !options.json;
  if (!attended && !options.join && !options.dry) {
    err.write(`error: ${NEEDS_JOIN}\n`);
    return 2;
  }
  const { rig } = chosen;
  const companion = options.record?.(rig, loaded.profiles);
  if (companion === null) return 2;
  return driving(
    {
      rig,
      openPort: (board) => portOf(rig, board, clock),
      memory: (onFault) => wakeMemory(wakeMemoryFile(resolve(file), env), onFault),
      unasked: options.join,
      dry: options.dry,
      real: true,
      forUs: options.for ?? null,
      json: options.json,
      logLevel: options.log,
      logFile: options.logFile ?? null,
      ...(companion === undefined ? {} : { companion }),
    },
    world,
  );
}

/** Makes a recording, begun or not; null: it cannot be, and has said why. */
export type MakeRecording = (rig: CompiledRig, profiles: LoadedRig['profiles']) => Companion | null;

export interface RecordOptions {
  readonly take: string | undefined;
  readonly takes: string | undefined;
  readonly countIn: number | undefined;
  readonly marks: readonly string[] | undefined;
}

/** What records is loaded here, before anything moves: it takes a tenth of a second. */
export async function recordingMaker(options: RecordOptions, world: World): Promise<MakeRecording> {
  const { recording } = await import('./take-recording.ts');
  const { take, takes, countIn, marks } = options;
  const folder = takesFolder(takes, world.env);
  const settings = { folder, name: take ?? null, countInUs: countIn ?? 0, marks: marks ?? [] };
  return (rig, profiles) => recording({ ...settings, rig, profiles }, world.err.write);
}

function chosenRig(
  rig: CompiledRig,
  { only, without, pace }: RunOptions,
): { readonly rig: CompiledRig } | { readonly mistakes: readonly string[] } {
  const chosen = chosenFollowers(
    rig.plan.followers.map(({ name }) => name),
    only,
    without,
  );
  if ('mistakes' in chosen) return chosen;
  const kept = withFollowers(rig, chosen.keep);
  return { rig: pace === undefined ? kept : { ...kept, plan: { ...kept.plan, pace } } };
}

const EXPLAINED = `
The arms wake in the pose that is shown, and start when you let them go (key g). Keys are on the
screen; ? explains them. Ctrl-C makes every follower brake and hold, and offers to park; again, it
leaves. SIGTERM brakes, holds and leaves.

${CAUTIONS.join('\n')}

Exit status: 0 done, 1 the run failed or an arm could not be parked, 2 the input was wrong,
130 interrupted.`;

/** `eidograph run RIG` */
export function runCommand(world: () => World = realWorld): CommandUnknownOpts {
  return new Command('run')
    .description('drive the followers of a rig by its leader (arms move: see the cautions in its help)')
    .argument('<rig>', 'the rig file')
    .option('--join', 'let the arms start without asking (needed where there is no terminal)')
    .option('--pace <percent>', "share of every speed limit, 1% to 100%, in place of the rig's own", paceOption)
    .option('--only <followers>', 'only these followers; several with commas', namesOption)
    .option('--without <followers>', 'all but these followers; several with commas', namesOption)
    .option('--dry', 'open the leader only: compute and show everything, send nothing')
    .option('--for <time>', 'after this time (500ms, 10s, 2min) park every follower and leave', durationOption)
    .option('--json', 'print the status as JSON, ten lines a second')
    .addOption(logOption())
    .option('--take <name>', 'record the run as a take; m marks, t ends it')
    .option('--count-in <time>', 'begin the recording only after this time', durationOption)
    .option('--marks <names>', 'names that its marks get in turn, with commas; then they are numbered', marksOption)
    .option('--takes <folder>', 'where takes live')
    .option('--log-file <file>', 'write the log there rather than to standard error')
    .addHelpText('after', EXPLAINED)
    .action(async (file, { join, pace, only, without, dry, for: forUs, json, log, logFile, ...asked }) => {
      const flags = { join: join === true, dry: dry === true, json: json === true };
      const rest = { pace, only, without, for: forUs, log, logFile };
      const at = world();
      const { take, takes, countIn, marks } = asked;
      const record = await recordingMaker({ take, takes, countIn, marks }, at);
      process.exitCode = await run(file, { ...flags, ...rest, record }, at);
    });
}

export function logOption(): Option<'--log <level>', undefined, 'warn', LogLevel> {
  return new Option('--log <level>', `how much is logged: ${LOG_LEVELS.join(', ')}`)
    .env('EIDOGRAPH_LOG')
    .default('warn' as const)
    .argParser(logLevelOption);
}
