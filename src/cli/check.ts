import { writeFileSync } from 'node:fs';
import { Command } from '@commander-js/extra-typings';
import type { CommandUnknownOpts } from '@commander-js/extra-typings';
import { reportDrawing } from '../check/drawing.ts';
import { reportOf } from '../check/report.ts';
import type { Report } from '../check/checked.ts';
import { reportLines } from '../check/text.ts';
import { readFromDisk } from '../rig/file-reader.ts';
import type { ReadFile } from '../rig/file-reader.ts';
import { loadProfile } from '../rig/load.ts';
import { mistakeLine } from '../rig/mistake.ts';
import type { ProfileMistake } from '../rig/mistake.ts';

/** Where a command prints: a stream, or a test's list. */
interface Out {
  write(text: string): unknown;
}

/** What `check --json` prints, in the units of files. */
interface CheckOutput extends Report {
  readonly file: string;
  readonly mistakes: readonly ProfileMistake[];
}

const NOTHING: Report = { leader: null, followers: [], over: [], warnings: [] };

/** `eidograph check FILE`: 0 all within limits, 1 something is over its limit, 2 mistakes. */
export function checkCommand(
  out: Out = process.stdout,
  err: Out = process.stderr,
  readFile: ReadFile = readFromDisk,
  writeFile: (file: string, text: string) => void = writeFileSync,
): CommandUnknownOpts {
  return new Command('check')
    .description('say every mistake in a rig or profile file, or what its arms will do')
    .argument('<file>', 'a rig, leader or follower file')
    .option('--json', 'print one JSON object')
    .option('--svg <file>', 'draw the arms from the side and from above, to scale')
    .action((file, { json, svg }) => {
      const loaded = loadProfile(file, readFile);
      if ('mistakes' in loaded) {
        const output: CheckOutput = { file, mistakes: loaded.mistakes, ...NOTHING };
        if (json === true) out.write(`${JSON.stringify(output, null, 2)}\n`);
        else err.write(`${loaded.mistakes.map(mistakeLine).join('\n')}\n`);
        process.exitCode = 2;
        return;
      }
      const report = reportOf(loaded);
      const output: CheckOutput = { file, mistakes: [], ...report };
      if (json === true) out.write(`${JSON.stringify(output, null, 2)}\n`);
      else out.write(`${[`${file}: no mistakes`, ...reportLines(report)].join('\n')}\n`);
      process.exitCode = report.over.length > 0 ? 1 : 0;
      if (svg === undefined) return;
      const fault = draw(svg, reportDrawing(loaded, report), writeFile);
      err.write(`${fault ?? `${svg}: drawn`}\n`);
      if (fault !== null) process.exitCode = 2;
    });
}

/** Null when it is drawn; else what is wrong, and what would be right. */
function draw(file: string, drawing: string | null, writeFile: (file: string, text: string) => void): string | null {
  if (drawing === null) return `${file}: nothing to draw; give arm: in a follower's file`;
  try {
    writeFile(file, drawing);
    return null;
  } catch (error) {
    const detail = error instanceof Error ? error.message : String(error);
    return `${file} cannot be written: ${detail}; name a file in a folder that may be written`;
  }
}
