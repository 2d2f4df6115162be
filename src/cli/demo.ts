import { fileURLToPath } from 'node:url';
import { Command } from '@commander-js/extra-typings';
import type { CommandUnknownOpts } from '@commander-js/extra-typings';
import type { LogLevel } from '../bridge/log.ts';
import { driving } from './driving.ts';
import { rigOrMistakes } from './load.ts';
import { durationOption, marksOption } from './options.ts';
import { portOf } from './port-of.ts';
import { logOption, type MakeRecording, recordingMaker } from './run.ts';
import { realWorld, type World } from './world.ts';

export interface DemoOptions {
  readonly for: number | undefined;
  readonly json: boolean;
  readonly log: LogLevel;
  readonly record?: MakeRecording;
}

/** From `src/cli` and from `dist/cli` alike. */
const RIG = fileURLToPath(new URL('../../profiles/rigs/lantern-yard.yaml', import.meta.url));

/** Drives the demo's rig with its simulated hand and arms; resolves with the exit status. */
export async function demo(options: DemoOptions, world: World): Promise<number> {
  const loaded = rigOrMistakes(RIG, world.err.write);
  if (loaded === null) return 1;
  const { rig } = loaded;
  const companion = options.record?.(rig, loaded.profiles);
  if (companion === null) return 2;
  return driving(
    {
      rig,
      openPort: (board) => portOf(rig, board, world.clock),
      memory: () => null,
      unasked: true,
      dry: false,
      real: false,
      forUs: options.for ?? null,
      json: options.json,
      logLevel: options.log,
      logFile: null,
      ...(companion === undefined ? {} : { companion }),
    },
    world,
  );
}

const EXPLAINED = `
Nothing real moves: the hand and the three arms are simulated in the program. The keys are those of
"eidograph run"; q ends it. With real arms, read the cautions of "eidograph run --help" first.`;

/** `eidograph demo` */
export function demoCommand(world: () => World = realWorld): CommandUnknownOpts {
  return new Command('demo')
    .description('drive three simulated arms by a simulated hand: no hardware, nothing real moves')
    .option('--for <time>', 'end after this time (10s, 2min)', durationOption)
    .option('--json', 'print the status as JSON, ten lines a second')
    .option('--take <name>', 'record the run as a take; m marks, t ends it')
    .option('--count-in <time>', 'begin the recording only after this time', durationOption)
    .option('--marks <names>', 'names that its marks get in turn, with commas; then they are numbered', marksOption)
    .option('--takes <folder>', 'where takes live')
    .addOption(logOption())
    .addHelpText('after', EXPLAINED)
    .action(async ({ for: forUs, json, log, take, takes, countIn, marks }) => {
      const at = world();
      const record = await recordingMaker({ take, takes, countIn, marks }, at);
      process.exitCode = await demo({ for: forUs, json: json === true, log, record }, at);
    });
}
