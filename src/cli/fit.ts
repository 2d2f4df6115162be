import { Command, InvalidArgumentError } from '@commander-js/extra-typings';
import type { CommandUnknownOpts } from '@commander-js/extra-typings';
import { existsSync } from 'node:fs';
import { CAUTIONS } from '../bridge/words.ts';
import { realClock } from '../clock/clock.ts';
import type { Capture } from '../fit/captures.ts';
import type { CompiledRig } from '../rig/compiled.ts';
import { loadRig } from '../rig/load.ts';
import { mistakeLine } from '../rig/mistake.ts';
import { metres } from '../rig/units.ts';
import { filesOnDisk, type FitFiles } from './fit-files.ts';
import { keeper, takesCaptures } from './fit-keeper.ts';
import { capturesOf, checkAgainst, type FitFlags, fitInto, type Printer } from './fit-offline.ts';
import { type FitTable, measure } from './fit-session.ts';
import { portOf } from './port-of.ts';

export interface FitOptions extends FitFlags {
  readonly from: string | undefined;
  readonly check: string | undefined;
}

/** Fits, or checks, from recorded captures; the exit status. */
export function fitFromCaptures(file: string, options: FitOptions, files: FitFiles, printer: Printer): number {
  const loaded = loadRig(file, files.readRig);
  if ('mistakes' in loaded) {
    printer.err(loaded.mistakes.map((mistake) => `${mistakeLine(mistake)}\n`).join(''));
    return 2;
  }
  const captures = capturesOf(options.from ?? options.check ?? '', files, printer);
  if (captures === null) return 2;
  if (captures.length === 0) {
    printer.err(`error: ${options.from ?? options.check}: there are no captures in it; measure some first\n`);
    return 2;
  }
  if (options.check !== undefined) return checkAgainst(loaded, captures, options.json, printer);
  return fitInto(file, loaded, captures, options, files, printer);
}

const NO_TERMINAL = 'there is no terminal to ask at; say --from captures.csv to fit what was recorded before';

/** Where a rig's session keeps its captures unless told otherwise: beside the rig. */
export function capturesBeside(rigFile: string): string {
  return `${rigFile.replace(/\.ya?ml$/i, '')}.captures.csv`;
}

function capturesToGoOnFrom(at: string, files: FitFiles, printer: Printer): readonly Capture[] | null {
  const text = files.read(at);
  if ('text' in text && text.text === '') return [];
  const captures = capturesOf(at, files, printer);
  if (captures === null || !('text' in text) || takesCaptures(text.text)) return captures;
  printer.err(
    `error: ${at}: its columns are not those of a session; name another file with --captures, or fit this one with --from\n`,
  );
  return null;
}

/**
 * Measures at a terminal, then fits; resolves with the exit status.
 * @param tableFor null: nobody sits at a terminal
 */
export async function fitMeasured(
  file: string,
  options: FitFlags & { readonly captures: string | undefined },
  tableFor: ((rig: CompiledRig) => FitTable) | null,
  files: FitFiles,
  printer: Printer,
): Promise<number> {
  const loaded = loadRig(file, files.readRig);
  if ('mistakes' in loaded) {
    printer.err(loaded.mistakes.map((mistake) => `${mistakeLine(mistake)}\n`).join(''));
    return 2;
  }
  if (tableFor === null) {
    printer.err(`error: ${NO_TERMINAL}\n`);
    return 2;
  }
  const at = options.captures ?? capturesBeside(file);
  const former = existsSync(at) ? capturesToGoOnFrom(at, files, printer) : [];
  if (former === null) return 2;
  const keeping = keeper(at);
  const ending = await measure(loaded, former, options.smooth ? null : options.wish, keeping, tableFor(loaded.rig));
  if (ending !== 'fit' && ending !== 'smoothed') {
    printer.err(
      `\nThe profiles are as they were. What was captured is in ${at}; the same command goes on from there.\n`,
    );
    return ending === 'quit' ? 0 : 130;
  }
  const captures = capturesOf(at, files, printer);
  return captures === null
    ? 1
    : fitInto(file, loaded, captures, { ...options, smooth: options.smooth || ending === 'smoothed' }, files, printer);
}

const JITTER_MM = 0.5;
const LAG_MS = 60;

function quantityOption(unit: string): (text: string) => number {
  return (text) => {
    const value = Number(text.trim().replace(new RegExp(`${unit}$`), ''));
    if (text.trim() !== '' && value > 0 && Number.isFinite(value)) return value;
    throw new InvalidArgumentError(`Give a number above 0, such as 0.5${unit}.`);
  };
}

const EXPLAINED = `
Without --from or --check it measures at this terminal, step by step: horns, wiring, noise at rest,
sweeps, points at known angles, servo travel and deadband, and the follower set alike. Every capture is kept as it
is made; list, redo, skip and quit are heard at every question, and the same command goes on later.

${CAUTIONS.join('\n')}

Captures are CSV with the columns step,arm,joint,counts,pulse_us,known_deg (more are allowed); the
steps are leader-still and leader-sweep (counts), leader-point (counts, known_deg), servo-point
(pulse_us, known_deg), servo-step (pulse_us, moved: 1 or 0) and match (counts, pulse_us).

Exit status: 0 done, 1 the run failed, some joint could not be fitted, or a map has drifted,
2 the input was wrong and nothing was written, 130 interrupted.`;

/** `eidograph fit RIG` */
export function fitCommand(
  files: FitFiles = filesOnDisk(),
  printer: Printer = {
    out: (text) => void process.stdout.write(text),
    err: (text) => void process.stderr.write(text),
  },
): CommandUnknownOpts {
  return new Command('fit')
    .description('measure pots and servos, fit their maps with the error stated, and write them into the profiles')
    .argument('<rig>', 'the rig file')
    .option('--from <file>', 'fit from captures recorded before, without a person')
    .option('--captures <file>', 'where the session keeps its captures; beside the rig when left out')
    .option('--check <file>', 'say whether the maps in the profiles have drifted from new captures')
    .option('--dry-run', 'show what would change in the profiles, and write nothing')
    .option('--partly', 'write what could be fitted even when some joint could not')
    .option('--report <file>', 'write a report with plots there, one HTML file')
    .option('--json', 'print every figure as one JSON object')
    .option(
      '--jitter <mm>',
      'largest jitter of a tip at rest that smoothing is suggested for',
      quantityOption('mm'),
      JITTER_MM,
    )
    .option('--lag <ms>', 'longest delay that the suggested smoothing may add', quantityOption('ms'), LAG_MS)
    .option('--smooth', 'write the suggested smoothing and deadbands too; a session asks')
    .addHelpText('after', EXPLAINED)
    .action(async (file, given) => {
      const { from, check, report, jitter, lag } = given;
      const options: FitOptions = {
        from,
        check,
        report,
        json: given.json === true,
        dryRun: given.dryRun === true,
        partly: given.partly === true,
        smooth: given.smooth === true,
        wish: { jitterM: metres(jitter), lagS: lag / 1000 },
      };
      if (from !== undefined && check !== undefined) {
        printer.err('error: --from and --check are two different things to do; leave one out\n');
        process.exitCode = 2;
        return;
      }
      if (from !== undefined || check !== undefined) {
        process.exitCode = fitFromCaptures(file, options, files, printer);
        return;
      }
      process.exitCode = await fitMeasured(file, { ...options, captures: given.captures }, realTable(), files, printer);
    });
}

function realTable(): ((rig: CompiledRig) => FitTable) | null {
  const { stdin, stdout, stderr } = process;
  // Figures may go to a file while somebody sits at the terminal.
  const output = stdout.isTTY ? stdout : stderr;
  if (!stdin.isTTY || !output.isTTY) return null;
  const clock = realClock();
  return (rig) => ({
    clock,
    openPort: (board) => portOf(rig, board, clock),
    input: stdin,
    output,
    isTerminal: process.env['TERM'] !== 'dumb',
    // A terminal that does not tell has lines of any length.
    columns: () => (output.columns > 0 ? output.columns : Number.POSITIVE_INFINITY),
  });
}
