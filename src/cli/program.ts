import { readFileSync } from 'node:fs';
import { Command, CommanderError } from '@commander-js/extra-typings';
import type { CommandUnknownOpts } from '@commander-js/extra-typings';
import { balanceCommand } from './balance.ts';
import { checkCommand } from './check.ts';
import { demoCommand } from './demo.ts';
import { fitCommand } from './fit.ts';
import { portsCommand } from './ports.ts';
import { runCommand } from './run.ts';
import { schemaCommand } from './schema.ts';
import { takeCommand } from './take.ts';
import { traceCommand } from './trace.ts';

const COMMANDS = [
  demoCommand,
  runCommand,
  portsCommand,
  checkCommand,
  balanceCommand,
  fitCommand,
  traceCommand,
  takeCommand,
  schemaCommand,
] as const;

const EXPLAINED = `
Begin with "eidograph demo", which needs no hardware; then copy a rig from the package's profiles
folder, mend it with "eidograph check", and drive it with "eidograph run --pace 25%".

Where arms move, keep out of their reach; this program is no emergency stop. "eidograph run --help"
says what has to be known.

Exit status: 0 done, 1 the run failed, 2 the input was wrong, 130 interrupted.`;

/** The whole command line. Commands set `process.exitCode`; what commander ends early is thrown to `runProgram`. */
function program(): CommandUnknownOpts {
  const root = new Command('eidograph')
    .description('Drive several robot arms of different sizes with one hand-held leader arm.')
    .version(version())
    .helpCommand('help [command]', 'explain a command')
    .showHelpAfterError('(--help explains)')
    .addHelpText('after', EXPLAINED)
    .exitOverride();
  for (const make of COMMANDS) root.addCommand(inheriting(make(), root));
  return root;
}

/** What is wrong in a subcommand's subcommand ends like everything else. */
function inheriting(command: CommandUnknownOpts, parent: CommandUnknownOpts): CommandUnknownOpts {
  command.copyInheritedSettings(parent);
  for (const sub of command.commands) inheriting(sub, command);
  return command;
}

/**
 * Runs the command line; resolves with the exit status.
 * @param args without the program's own name
 */
export async function runProgram(args: readonly string[]): Promise<number> {
  try {
    await program().parseAsync([...args], { from: 'user' });
    return Number(process.exitCode ?? 0);
  } catch (ended) {
    if (!(ended instanceof CommanderError)) throw ended;
    // Help and version end commander early as well, and are no mistake.
    return ended.exitCode === 0 ? 0 : 2;
  }
}

function version(): string {
  const file: unknown = JSON.parse(readFileSync(new URL('../../package.json', import.meta.url), 'utf8'));
  return typeof file === 'object' && file !== null && 'version' in file ? String(file.version) : '';
}
