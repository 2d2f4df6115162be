import type { Capture } from '../fit/captures.ts';
import { type Change, changesOf, lineDiff } from '../fit/changes.ts';
import { checkCaptures, driftLine } from '../fit/check-part.ts';
import { plannedEdits } from '../fit/edits.ts';
import { leaderFigures, matchFigures, servoFigures, suggestionLines, type FigureLine } from '../fit/figures.ts';
import { fitCaptures } from '../fit/fit.ts';
import { reportHtml } from '../fit/html.ts';
import { problemLine } from '../fit/problems.ts';
import type { FitReport } from '../fit/report.ts';
import type { SuggestWish } from '../fit/suggest.ts';
import type { LoadedRig } from '../rig/load.ts';
import { mistakeLine } from '../rig/mistake.ts';
import { csvMistakeLine } from './csv-mistake.ts';
import { readCaptures } from './fit-captures-csv.ts';
import type { FitFiles } from './fit-files.ts';

export interface FitFlags {
  readonly json: boolean;
  readonly dryRun: boolean;
  /** Write what could be fitted although some could not. */
  readonly partly: boolean;
  readonly report: string | undefined;
  /** Write the suggested smoothing and deadbands too. */
  readonly smooth: boolean;
  readonly wish: SuggestWish;
}

export interface Printer {
  readonly out: (text: string) => void;
  readonly err: (text: string) => void;
}

/** The captures of a file, or null when it has mistakes: they have then been said. */
export function capturesOf(file: string, files: FitFiles, { err }: Printer): readonly Capture[] | null {
  const text = files.read(file);
  if ('fault' in text) {
    err(`error: ${file}: ${text.detail}; name a file of captures\n`);
    return null;
  }
  const read = readCaptures(text.text);
  if ('captures' in read) return read.captures;
  err(read.mistakes.map((mistake) => `${csvMistakeLine(file, mistake)}\n`).join(''));
  return null;
}

/** Fits captures and writes what comes of them; resolves with the exit status. */
export function fitInto(
  rigFile: string,
  loaded: LoadedRig,
  captures: readonly Capture[],
  flags: FitFlags,
  files: FitFiles,
  printer: Printer,
): number {
  const { out, err } = printer;
  const calendar = files.now();
  const report = fitCaptures(loaded.profiles, captures, {
    rig: loaded.rig.name,
    date: calendar.date,
    wish: flags.wish,
  });
  const planned = plannedEdits(rigFile, files.readRig, loaded.profiles, report, flags.smooth);
  const whole: FitReport = { ...report, problems: [...report.problems, ...planned.problems] };
  if (flags.json) out(`${JSON.stringify(whole, null, 2)}\n`);
  else out(textOf(whole));
  if (flags.report !== undefined) {
    const fault = files.writeNew(flags.report, reportHtml(whole, captures));
    if (fault !== null) {
      err(`error: ${fault}\n`);
      return 1;
    }
    err(`The report is in ${flags.report}.\n`);
  }
  err(whole.problems.map((each) => `${problemLine(each)}\n`).join(''));
  if (whole.problems.length > 0 && !flags.partly) {
    err('Nothing was written. --partly writes what could be fitted.\n');
    return 2;
  }
  const changed = changesOf(rigFile, files.readRig, planned.files);
  if ('uneditable' in changed) {
    err(`error: ${changed.uneditable}: ${changed.path}: it cannot be edited in place; write plain YAML there\n`);
    return 1;
  }
  if ('mistakes' in changed) {
    err('As fitted, the rig would have mistakes, so nothing was written:\n');
    err(changed.mistakes.map((mistake) => `${mistakeLine(mistake)}\n`).join(''));
    return 1;
  }
  if (changed.changes.length === 0) {
    err('Nothing in the profiles changes.\n');
    return 0;
  }
  const status = flags.dryRun ? shown(changed.changes, printer, flags.json) : written(changed.changes, files, err);
  return whole.problems.length > 0 ? Math.max(status, 1) : status;
}

function shown(changes: readonly Change[], { out, err }: Printer, json: boolean): number {
  // With --json, standard output is for the one object.
  const print = json ? err : out;
  for (const { file, was, text } of changes) {
    print(
      `${file}:\n${lineDiff(was, text)
        .map((line) => `${line.mark} ${line.text}\n`)
        .join('')}`,
    );
  }
  err('This was a dry run: nothing was written.\n');
  return 0;
}

function written(changes: readonly Change[], files: FitFiles, err: (text: string) => void): number {
  for (const [i, change] of changes.entries()) {
    const done = files.replace(change);
    if ('wrong' in done) {
      // All files or none: a leader fitted anew and a follower that is not would not belong together.
      for (const former of changes.slice(0, i)) files.takeBack(former);
      err(`error: ${done.wrong}; ${done.right}\n`);
      return 1;
    }
    err(`${change.file} has the fitted values; the old file is ${done.kept ?? change.file}.\n`);
  }
  return 0;
}

/** Tests the profiles against captures; resolves with the exit status. */
export function checkAgainst(
  loaded: LoadedRig,
  captures: readonly Capture[],
  json: boolean,
  { out, err }: Printer,
): number {
  const reports = checkCaptures(loaded.profiles, captures);
  if (reports.length === 0) {
    err('error: no capture has a known angle of a joint of this rig; capture leader-point or servo-point\n');
    return 2;
  }
  out(json ? `${JSON.stringify(reports, null, 2)}\n` : reports.map((each) => `${driftLine(each)}\n`).join(''));
  return reports.some(({ drifted }) => drifted) ? 1 : 0;
}

/** The report as lines for people. */
function textOf(report: FitReport): string {
  const blocks = [
    ...report.joints.map((joint) => block(`${joint.leader} ${joint.joint}`, leaderFigures(joint), joint.notes)),
    ...report.servos.map((servo) =>
      block(`${servo.follower} ${servo.joint}, servo at channel ${servo.channel}`, servoFigures(servo), servo.notes),
    ),
    ...report.matches.map((match) =>
      block(`${match.follower} ${match.joint}, set alike`, matchFigures(match), match.notes),
    ),
    ...(report.suggestions.length === 0
      ? []
      : [block('smoothing that would keep the tips still', suggestionLines(report), [])]),
  ];
  return blocks.join('\n');
}

function block(heading: string, figures: readonly FigureLine[], notes: readonly string[]): string {
  const width = Math.max(0, ...figures.map(([what]) => what.length));
  const lines = figures.map(([what, value]) => `  ${what.padEnd(width)}  ${value}\n`);
  return `${heading}\n${lines.join('')}${notes.map((note) => `  ! ${note}\n`).join('')}`;
}
