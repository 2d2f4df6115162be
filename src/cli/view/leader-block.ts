import type { BoardStatus } from '../../bridge/live.ts';
import { FROZEN, HEALTH_WORDS, supplyWord } from '../../bridge/words.ts';
import type { LeaderStatus } from '../../drive/status.ts';
import { degrees } from './figures.ts';
import { columnsFor, fitted, inColumns, type Line, padded, span, type Span, widthOf, wrapped } from './layout.ts';
import { portSpan } from './port-word.ts';
import type { Shapes } from './shapes.ts';

export type LeaderDetail = 'joints' | 'heading' | 'none';

const INDENT = 4;
const GAP = 3;

export function leaderBlock(
  leader: LeaderStatus,
  port: BoardStatus | null,
  detail: LeaderDetail,
  width: number,
  shapes: Shapes,
): readonly Line[] {
  if (detail === 'none') return [];
  const care = careLines(leader, width, shapes);
  if (detail === 'heading') return [heading(leader, port, width), ...care];
  const cells = inColumns(jointCells(leader, shapes), width - INDENT, GAP);
  return [heading(leader, port, width), ...cells.map((row) => [span(' '.repeat(INDENT)), ...row]), ...care];
}

export function leaderHeight(leader: LeaderStatus, detail: LeaderDetail, width: number, shapes: Shapes): number {
  if (detail === 'none') return 0;
  const care = careLines(leader, width, shapes).length;
  if (detail === 'heading') return 1 + care;
  const cells = jointCells(leader, shapes);
  const columns = columnsFor(Math.max(0, ...cells.map(widthOf)), width - INDENT, GAP);
  return 1 + Math.ceil(cells.length / columns) + care;
}

function heading(leader: LeaderStatus, port: BoardStatus | null, width: number): Line {
  const sick = leader.joints.filter(({ health }) => health !== 'sound').length;
  const buttons = leader.buttons.map(({ button, does, pressed }) => ({
    line: [span(`${button} (${does}) ${pressed ? 'pressed' : 'up'}`, pressed ? 'strong' : 'dim')],
    matters: 2,
  }));
  return fitted(
    [
      { line: [span('leader '), span(leader.leader, 'strong')], matters: 9 },
      { line: [potsSpan(leader)], matters: sick === 0 ? 3 : 5 },
      ...buttons,
      { line: [portSpan(port)], matters: port?.ready === true ? 1 : 4 },
      { line: [span(damage(port), 'dim')], matters: 0 },
    ],
    width,
    3,
  );
}

/** A leader that has said nothing yet has its port to blame, not each of its pots. */
function potsSpan({ joints, reading_age_us }: LeaderStatus): Span {
  if (reading_age_us === null) return span('not heard', 'waiting');
  const sick = joints.filter(({ health }) => health !== 'sound').length;
  return sick === 0 ? span('every pot sound', 'good') : span(`${sick} sick`, 'bad');
}

/** Messages of a port that came damaged or not at all; empty where there are none. */
export function damage(port: BoardStatus | null): string {
  if (port === null) return '';
  const counts = [
    port.lost > 0 ? `${port.lost} lost` : '',
    port.garbled > 0 ? `${port.garbled} damaged` : '',
    port.reboots > 0 ? `${port.reboots} restarts` : '',
  ];
  return counts.filter((text) => text !== '').join(', ');
}

function jointCells(leader: LeaderStatus, shapes: Shapes): readonly Line[] {
  const nameWidth = Math.max(...leader.joints.map(({ joint }) => joint.length));
  return leader.joints.map(({ joint, counts, angle_deg, health, frozen }) => {
    const sick = health !== 'sound';
    const word = frozen && !sick ? FROZEN[0] : HEALTH_WORDS[health][0];
    const read = counts === null ? '–' : String(Math.round(counts));
    return padded(
      [
        span(joint.padEnd(nameWidth), sick ? 'bad' : 'plain'),
        span(` ${read.padStart(5)}`, 'dim'),
        span(` ${degrees(angle_deg)}${shapes.degree} `),
        span(word, sick ? 'bad' : frozen ? 'held' : 'good'),
      ],
      // The longest word of health, so that columns stay where they are when a pot falls ill.
      nameWidth + 25,
    );
  });
}

function careLines(leader: LeaderStatus, width: number, shapes: Shapes): readonly Line[] {
  const texts = leader.joints.flatMap(({ joint, health, frozen }) => {
    if (health !== 'sound') return [`${joint}: ${HEALTH_WORDS[health].join(': ')}`];
    return frozen ? [`${joint}: ${FROZEN.join(': ')}`] : [];
  });
  const silent = leader.reading_age_us === null;
  const shown = silent ? [] : texts;
  const all = leader.supply_ratio === 1 ? shown : [...shown, supplyWord(leader.supply_ratio)];
  return all
    .flatMap((text) =>
      wrapped(text, width - INDENT - 2).map((piece, i) => [i === 0 ? shapes.care : ' ', piece] as const),
    )
    .map(([sign, piece]) => [span(' '.repeat(INDENT)), span(`${sign} ${piece}`, 'held')]);
}
