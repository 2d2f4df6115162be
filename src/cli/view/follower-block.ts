import type { BoardStatus } from '../../bridge/live.ts';
import { BLOCK_WORDS, CLUTCHED, faultWords, GOING, LIMIT_WORDS, STATE_WORDS, WAKES_AT } from '../../bridge/words.ts';
import type { FollowerStatus } from '../../drive/status.ts';
import type { State } from '../../follower/states.ts';
import { bar } from './bar.ts';
import { degrees, milliseconds, percent } from './figures.ts';
import { columnsFor, fitted, inColumns, type Line, span, wrapped } from './layout.ts';
import { damage } from './leader-block.ts';
import { portSpan } from './port-word.ts';
import type { WakesAt } from './scene.ts';
import { type Shapes, STATE_TONES } from './shapes.ts';

/** How much of a follower is shown: a line a joint; joints side by side; what it waits for; one line. */
export type FollowerDetail = 'joints' | 'columns' | 'reason' | 'heading';

export interface FollowerScene {
  readonly status: FollowerStatus;
  /** Counted from 1: the key that selects it. */
  readonly number: number;
  readonly selected: boolean;
  readonly perSecond: number;
  readonly port: BoardStatus | null;
  readonly wakesAt: WakesAt;
  /** Of the longest name in the rig. */
  readonly nameWidth: number;
}

const INDENT = 6;
const GAP = 3;
const SMALL_BAR = 13;
const BAR_MIN = 10;
const BAR_MAX = 48;
/** From this width on a joint's line holds its range, its target and what limits it in words. */
const WIDE = 76;
const STANDS_DEG = 0.05;
/** From this share on a motor's load or warmth is shown. */
const STRAINED = 0.8;

type Joint = FollowerStatus['joints'][number];

export function followerBlock(
  scene: FollowerScene,
  detail: FollowerDetail,
  width: number,
  shapes: Shapes,
): readonly Line[] {
  const { joints, state } = scene.status;
  const indent = span(' '.repeat(INDENT));
  const reason = reasonLines(scene, detail, width).map((text): Line => [indent, span(text, 'held')]);
  const top = [heading(scene, detail, width, shapes), ...(detail === 'heading' ? [] : reason)];
  switch (detail) {
    case 'heading':
    case 'reason':
      return top;
    case 'columns': {
      const cells = joints.map((joint) => smallJoint(joint, state, nameWidthOf(joints), shapes));
      return [...top, ...inColumns(cells, width - INDENT, GAP).map((row) => [indent, ...row])];
    }
    case 'joints':
      return [
        ...top,
        ...joints.map((joint) => [indent, ...largeJoint(joint, state, nameWidthOf(joints), width, shapes)]),
      ];
  }
}

export function followerHeight(scene: FollowerScene, detail: FollowerDetail, width: number): number {
  if (detail === 'heading') return 1;
  const { joints } = scene.status;
  const top = 1 + reasonLines(scene, detail, width).length;
  if (detail === 'reason') return top;
  if (detail === 'joints') return top + joints.length;
  return top + Math.ceil(joints.length / columnsFor(smallWidth(nameWidthOf(joints)), width - INDENT, GAP));
}

function heading(scene: FollowerScene, detail: FollowerDetail, width: number, shapes: Shapes): Line {
  const { status, number, selected, perSecond, port, nameWidth } = scene;
  const tone = STATE_TONES[status.state];
  const lost = damage(port);
  return fitted(
    [
      {
        line: [
          span(selected ? `[${number}] ` : ` ${number}  `, selected ? 'strong' : 'dim'),
          span(`${status.follower.padEnd(nameWidth)} `, selected ? 'strong' : 'plain'),
          span(`${shapes.states[status.state]} ${status.state.padEnd(9)}`, tone),
        ],
        matters: 9,
      },
      // Where each joint has a line of its own and there is room, what limits it stands there.
      { line: detail === 'joints' && width >= WIDE ? [] : [span(limitWords(status), 'held')], matters: 5 },
      { line: [span(lost, 'held')], matters: 4 },
      { line: [portSpan(port)], matters: port === null || port.ready ? 1 : 6 },
      { line: [span(`${perSecond.toFixed(0)}/s`)], matters: 3 },
      { line: [span(`lag ${milliseconds(status.lag_us)}`)], matters: 2 },
      { line: [span(highestLoad(status))], matters: 2 },
    ],
    width,
    2,
  );
}

const LIMITS_SHOWN = (Object.keys(LIMIT_WORDS) as (keyof typeof LIMIT_WORDS)[]).filter((kind) => kind !== 'deadband');

/** What limits its joints, deadbands left out: standing in one is as it should be. */
function limitWords({ joints, state }: FollowerStatus): string {
  const strained = joints.flatMap((joint) => strainWords(joint).map((text) => `${text}: ${joint.joint}`));
  const limited = LIMITS_SHOWN.map((kind) => {
    const names = joints.filter((joint) => limitsOf(joint, state).includes(kind)).map(({ joint }) => joint);
    return names.length === 0 ? '' : `${LIMIT_WORDS[kind]}: ${names.join(' ')}`;
  });
  return [...strained, ...limited].filter((text) => text !== '').join(', ');
}

/** Why it does not follow and what to do, one sentence a reason. */
export function reasons(
  { state, going, blocked_by, clutched }: FollowerStatus,
  port: BoardStatus | null,
): readonly string[] {
  if (state === 'absent' && port !== null && port.fault !== null) return [faultWords(port.port, port.fault)];
  if (state === 'waking') return [going ? GOING : STATE_WORDS.waking];
  if (state === 'following') return clutched ? [CLUTCHED] : [];
  const blocks = state === 'holding' ? blocked_by.map((block) => BLOCK_WORDS[block]) : [];
  return [STATE_WORDS[state], ...blocks].filter((text) => text !== '');
}

function reasonLines(scene: FollowerScene, detail: FollowerDetail, width: number): readonly string[] {
  const { status, port, wakesAt } = scene;
  const texts = [...reasons(status, port)];
  if (status.state === 'waking' && !status.going) {
    texts[0] = WAKES_AT[wakesAt];
    // Where the joints are not listed, the pose has to be told in words: nobody may let go an arm unseen.
    if (detail === 'reason')
      texts.push(status.joints.map((j) => `${j.joint} ${degrees(j.angle_deg).trim()}`).join(', '));
  }
  return texts.flatMap((text) => wrapped(text, width - INDENT));
}

function nameWidthOf(joints: readonly Joint[]): number {
  return Math.max(0, ...joints.map(({ joint }) => joint.length));
}

function smallWidth(nameWidth: number): number {
  return nameWidth + 1 + SMALL_BAR + 8 + 2;
}

function smallJoint(joint: Joint, state: State, nameWidth: number, shapes: Shapes): Line {
  const limited = limitsOf(joint, state).some((limit) => limit !== 'deadband');
  return [
    span(`${joint.joint.padEnd(nameWidth)} `, limited ? 'held' : 'plain'),
    ...bar(joint, SMALL_BAR, shapes),
    span(` ${degrees(joint.angle_deg)}${shapes.degree}`),
    span(limited ? ` ${shapes.care}` : '  ', 'held'),
  ];
}

/**
 * What limits a joint now. What did before it was held says nothing any more, and a deadband is worth a word only where
 * it explains why a joint stands: on the way it is always trailed by.
 */
function limitsOf({ limited_by, angle_deg, target_deg }: Joint, state: State): Joint['limited_by'] {
  const follows = state === 'following' || state === 'joining' || state === 'parking';
  const stands = Math.abs(target_deg - angle_deg) < STANDS_DEG;
  return limited_by.filter((limit) => (limit === 'deadband' ? follows && stands : follows || limit === 'sick'));
}

/** The joint that carries most of what its motor may give; empty where the file knows no motor. */
function highestLoad({ joints }: FollowerStatus): string {
  let most = -1;
  let where = '';
  for (const { joint, load_share } of joints) {
    if (load_share === null || load_share <= most) continue;
    most = load_share;
    where = joint;
  }
  return where === '' ? '' : `load ${Math.round(100 * most)} % ${where}`;
}

/** A motor near what it may give, or near what it may take in warmth. */
function strainWords({ load_share, warmth }: Joint): readonly string[] {
  return [
    load_share !== null && load_share >= STRAINED ? `load ${percent(load_share)}` : '',
    warmth !== null && warmth >= STRAINED ? `warmth ${percent(warmth)}` : '',
  ].filter((text) => text !== '');
}

/** Name, range and bar, angle, target, limits; on a narrow screen only name, bar and angle, and limits as they fit. */
function largeJoint(joint: Joint, state: State, nameWidth: number, width: number, shapes: Shapes): Line {
  const wide = width >= WIDE;
  const [low, high] = joint.range_deg;
  const left = span(wide ? `${joint.joint.padEnd(nameWidth)} ${degrees(low)} ` : `${joint.joint.padEnd(nameWidth)} `);
  const right = span(wide ? ` ${degrees(high).trimStart().padEnd(6)}` : '', 'dim');
  const angle = span(` ${degrees(joint.angle_deg)}${shapes.degree}`, 'strong');
  const target = span(wide ? `  ${shapes.target}${degrees(joint.target_deg)}${shapes.degree}` : '', 'moving');
  const limited = limitsOf(joint, state);
  const strain = strainWords(joint);
  const limits = [...strain, ...limited.map((limit) => LIMIT_WORDS[limit])].join(', ');
  // Two limits at once where there is room for them; the bar must not jump as limits come and go.
  const limitsRoom = width >= 96 ? 26 : wide ? 14 : 2;
  const used = INDENT + [left, right, angle, target].reduce((sum, { text }) => sum + text.length, 0) + limitsRoom;
  const barWidth = Math.min(Math.max(width - used, BAR_MIN), BAR_MAX);
  const onlyDeadband = strain.length === 0 && limited.every((limit) => limit === 'deadband');
  return [
    left,
    ...bar(joint, barWidth, shapes),
    right,
    angle,
    target,
    wide
      ? span(limits === '' ? '' : `  ${limits}`, onlyDeadband ? 'dim' : 'held')
      : span(onlyDeadband ? '' : ` ${shapes.care}`, 'held'),
  ];
}
