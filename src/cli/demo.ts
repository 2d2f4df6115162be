import { fileURLToPath } from 'node:url';
import { Command } from '@commander-js/extra-typings';
import type { CommandUnknownOpts } from '@commander-js/extra-typings';
import type { LogLevel } from '../bridge/log.ts';
import { driving } from './driving.ts';
import { rigOrMistakes } from './load.ts';
import { durationOption } from './options.ts';
import { portOf } from './port-of.ts';
import { logOption } from './run.ts';
import { realWorld, type World } from './world.ts';

export interface DemoOptions {
  readonly for: number | undefined;
  readonly json: boolean;
  readonly log: LogLevel;
}

/** From `src/cli` and from `dist/cli` alike. */
const RIG = fileURLToPath(new URL('../../profiles/rigs/lantern-yard.yaml', import.meta.url));

/** Drives the demo's rig with its simulated hand and arms; resolves with the exit status. */
export async function demo(options: DemoOptions, world: World): Promise<number> {
  const loaded = rigOrMistakes(RIG, world.err.write);
  if (loaded === null) return 1;
  const { rig } = loaded;
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
    .addOption(logOption())
    .addHelpText('after', EXPLAINED)
    .action(async ({ for: forUs, json, log }) => {
      process.exitCode = await demo({ for: forUs, json: json === true, log }, world());
    });
}
