import { FONT } from '../draw/ink.ts';
import { element, escaped } from '../draw/svg.ts';
import type { Capture } from './captures.ts';
import { type FigureLine, leaderFigures, matchFigures, servoFigures, suggestionLines } from './figures.ts';
import { leaderPlots, matchPlots, servoPlots } from './plots.ts';
import { problemLine } from './problems.ts';
import type { FitReport } from './report.ts';

const STYLE = `
body { font: 10.5pt/1.45 ${FONT}; color: #000; background: #fff; margin: 2em auto; max-width: 190mm; padding: 0 4mm; }
h1 { font-size: 17pt; margin-bottom: 0; } h2 { font-size: 13pt; margin: 1.6em 0 0.3em; border-bottom: 0.3mm solid #000; }
h3 { font-size: 11pt; margin: 1em 0 0.3em; } section { break-inside: avoid; }
table { border-collapse: collapse; } td { padding: 0.3mm 5mm 0.3mm 0; vertical-align: top; }
td:first-child { white-space: nowrap; } .plots { display: flex; flex-wrap: wrap; gap: 2mm; margin: 2mm 0; }
.plots svg { max-width: 100%; height: auto; } li { margin: 0.5mm 0; }
.care { border-left: 1mm solid #D55E00; padding-left: 3mm; } .care::before { content: "Look at this: "; font-weight: bold; }
@page { size: A4; margin: 14mm; } @media print { body { margin: 0; max-width: none; padding: 0; } }
`;

/** The report as one file that needs no other: figures, sentences and plots. */
export function reportHtml(report: FitReport, captures: readonly Capture[]): string {
  const { rig, date, joints, servos, matches, problems } = report;
  const title = `Fit of ${rig}, ${date}`;
  const body = [
    element('h1', {}, escaped(title)),
    element('p', {}, escaped(summary(report))),
    problems.length === 0 ? '' : care('Not fitted', problems.map(problemLine)),
    ...group('Leader', joints, (joint) =>
      section(`${joint.leader} ${joint.joint}`, leaderFigures(joint), joint.notes, leaderPlots(joint, captures)),
    ),
    ...group('Servos', servos, (servo) =>
      section(
        `${servo.follower} ${servo.joint}, channel ${servo.channel}`,
        servoFigures(servo),
        servo.notes,
        servoPlots(servo),
      ),
    ),
    ...group('Followers set alike', matches, (match) =>
      section(`${match.follower} ${match.joint}`, matchFigures(match), match.notes, matchPlots(match)),
    ),
    report.suggestions.length === 0
      ? ''
      : element('h2', {}, 'Smoothing that would keep the tips still') + table(suggestionLines(report)),
  ];
  return `<!doctype html>\n${element(
    'html',
    { lang: 'en' },
    element(
      'head',
      {},
      '<meta charset="utf-8">',
      '<meta name="viewport" content="width=device-width, initial-scale=1">',
      element('title', {}, escaped(title)),
      element('style', {}, STYLE),
    ),
    element('body', {}, ...body),
  )}\n`;
}

function summary({ joints, servos, matches, problems }: FitReport): string {
  const fitted = joints.filter(({ points }) => points !== null).length;
  const parts = [
    `${fitted} leader joint${fitted === 1 ? '' : 's'}`,
    `${servos.length} servo${servos.length === 1 ? '' : 's'}`,
    `${matches.length} pairing${matches.length === 1 ? '' : 's'}`,
  ];
  const left = problems.length === 0 ? '' : `; ${problems.length} could not be fitted as asked`;
  return `Fitted: ${parts.join(', ')}${left}. Errors are half widths of 95 % intervals.`;
}

function group<T>(heading: string, members: readonly T[], shown: (member: T) => string): readonly string[] {
  return members.length === 0 ? [] : [element('h2', {}, heading), ...members.map(shown)];
}

function section(
  heading: string,
  figures: readonly FigureLine[],
  notes: readonly string[],
  plots: readonly string[],
): string {
  return element(
    'section',
    {},
    element('h3', {}, escaped(heading)),
    table(figures),
    ...notes.map((note) => element('p', { class: 'care' }, escaped(note))),
    element('div', { class: 'plots' }, ...plots),
  );
}

function care(heading: string, lines: readonly string[]): string {
  return element('h2', {}, heading) + lines.map((line) => element('p', { class: 'care' }, escaped(line))).join('');
}

function table(lines: readonly FigureLine[]): string {
  const rows = lines.map(([what, value]) =>
    element('tr', {}, element('td', {}, escaped(what)), element('td', {}, escaped(value))),
  );
  return element('table', {}, element('tbody', {}, ...rows));
}
