import { CAUTIONS } from '../../bridge/words.ts';
import { US_PER_S } from '../../clock/clock.ts';
import { contact, percent, seconds } from './figures.ts';
import { type FollowerDetail, followerBlock, followerHeight, type FollowerScene } from './follower-block.ts';
import { helpLines, keyLines } from './keys-line.ts';
import { clipped, fitted, type Line, span, wrapped } from './layout.ts';
import { leaderBlock, type LeaderDetail, leaderHeight } from './leader-block.ts';
import type { Message, Scene, Size } from './scene.ts';
import type { Shapes } from './shapes.ts';

/** How much of each thing is shown, the richest first: what a smaller screen loses first stands first. */
interface Detail {
  readonly leader: LeaderDetail;
  readonly followers: FollowerDetail;
  readonly messages: number;
  readonly cautions: number;
  readonly keys: number;
  readonly airy: boolean;
}

const ALL_OF_THEM = 99;
const DETAILS: readonly Detail[] = [
  { leader: 'joints', followers: 'joints', messages: 4, cautions: ALL_OF_THEM, keys: 2, airy: true },
  { leader: 'joints', followers: 'joints', messages: 3, cautions: ALL_OF_THEM, keys: 2, airy: false },
  { leader: 'heading', followers: 'joints', messages: 2, cautions: ALL_OF_THEM, keys: 2, airy: false },
  { leader: 'joints', followers: 'columns', messages: 4, cautions: ALL_OF_THEM, keys: 2, airy: true },
  { leader: 'joints', followers: 'columns', messages: 3, cautions: ALL_OF_THEM, keys: 2, airy: false },
  { leader: 'heading', followers: 'columns', messages: 2, cautions: ALL_OF_THEM, keys: 2, airy: false },
  { leader: 'heading', followers: 'reason', messages: 2, cautions: ALL_OF_THEM, keys: 2, airy: false },
  { leader: 'heading', followers: 'reason', messages: 2, cautions: 2, keys: 2, airy: false },
  { leader: 'heading', followers: 'heading', messages: 2, cautions: 2, keys: 2, airy: false },
  { leader: 'none', followers: 'heading', messages: 1, cautions: 1, keys: 1, airy: false },
];
const MESSAGES_MAX = 8;
const NOTE_SHOWN_US = 15 * US_PER_S;
const CARE_SHOWN_US = 120 * US_PER_S;

/** The whole picture: at most `rows` lines of at most `columns` columns. Pure: the same scene gives the same picture. */
export function frame(scene: Scene, size: Size, shapes: Shapes): readonly Line[] {
  const { columns, rows } = size;
  if (columns < 1 || rows < 1) return [];
  const lines = scene.help ? helpPage(scene, size, shapes) : livePage(scene, size, shapes);
  return lines.slice(0, rows).map((line) => clipped(line, columns, shapes.cut));
}

function helpPage(scene: Scene, { columns }: Size, shapes: Shapes): readonly Line[] {
  const legend = `${shapes.angle} where a joint is told to be   ${shapes.target} where it is to go   ${shapes.both} both`;
  return [
    title(scene, columns),
    [],
    ...helpLines(scene.status.followers.length, columns),
    [],
    ...wrapped(legend, columns).map((text): Line => [span(text)]),
    [],
    ...cautionLines(columns, shapes),
  ];
}

function livePage(scene: Scene, { columns, rows }: Size, shapes: Shapes): readonly Line[] {
  const followers = followerScenes(scene);
  const { leader } = scene.status;
  const leaderPort = scene.status.boards.find(({ leads }) => leads) ?? null;
  const prompt = scene.prompt === null ? [] : wrapped(scene.prompt, columns).map((text): Line => [span(text, 'bad')]);
  const said = messageLines(freshOf(scene), columns, shapes);
  const must = scene.cautions ? cautionLines(columns, shapes) : [];

  const detailOf = (one: FollowerScene, detail: Detail, focus: FollowerDetail | null): FollowerDetail =>
    focus !== null && one.selected ? focus : detail.followers;
  const height = (detail: Detail, focus: FollowerDetail | null): number => {
    const blocks = followers.map((one) => followerHeight(one, detailOf(one, detail, focus), columns));
    return (
      1 +
      leaderHeight(leader, detail.leader, columns, shapes) +
      blocks.reduce((sum, block) => sum + block, 0) +
      (detail.airy ? followers.length + 2 : 0) +
      Math.max(Math.min(said.length, detail.messages), Math.min(must.length, detail.cautions)) +
      prompt.length +
      keyLines(followers.length, columns, detail.keys).length
    );
  };

  const choices = choicesFor(scene);
  const { detail, focus } =
    choices.find((choice) => height(choice.detail, choice.focus) <= rows) ?? (choices.at(-1) as Choice);
  const gap: readonly Line[] = detail.airy ? [[]] : [];
  const head = [title(scene, columns), ...gap, ...leaderBlock(leader, leaderPort, detail.leader, columns, shapes)];
  const blocks = followers.map((one) => [...gap, ...followerBlock(one, detailOf(one, detail, focus), columns, shapes)]);
  const foot = [...prompt, ...keyLines(followers.length, columns, detail.keys)];
  const room = Math.max(0, rows - head.length - foot.length);
  const shown = withinRows(blocks, room, scene);
  const left = room - shown.length;
  const told = must.slice(0, left);
  const heard = left > told.length ? said.slice(told.length - left).slice(-MESSAGES_MAX) : [];
  const spare = left - told.length - heard.length;
  return [...head, ...shown, ...Array.from({ length: spare }, (): Line => []), ...told, ...heard, ...foot];
}

interface Choice {
  readonly detail: Detail;
  readonly focus: FollowerDetail | null;
}

/** Where some followers are selected and others not, the selected ones keep their detail longest. */
function choicesFor({ selected }: Scene): readonly Choice[] {
  const some = selected.includes(true) && selected.includes(false);
  const foci: readonly (FollowerDetail | null)[] = some ? ['joints', 'columns', 'reason', null] : [null];
  return foci.flatMap((focus) => DETAILS.map((detail) => ({ detail, focus })));
}

function followerScenes(scene: Scene): readonly FollowerScene[] {
  const { followers, boards } = scene.status;
  const nameWidth = Math.max(0, ...followers.map(({ follower }) => follower.length));
  return followers.map((status, f) => ({
    status,
    number: f + 1,
    selected: scene.selected[f] ?? false,
    perSecond: scene.perSecond[f] ?? 0,
    port: boards.find((board) => board.followers.includes(status.follower)) ?? null,
    wakesAt: scene.wakesAt[f] ?? 'rest',
    nameWidth,
  }));
}

/** As many whole blocks as fit; the rest is counted by state. */
function withinRows(blocks: readonly (readonly Line[])[], rows: number, scene: Scene): readonly Line[] {
  if (blocks.reduce((sum, block) => sum + block.length, 0) <= rows) return blocks.flat();
  const shown: Line[] = [];
  let count = 0;
  for (const block of blocks) {
    if (shown.length + block.length > rows - 1) break;
    shown.push(...block);
    count++;
  }
  const hidden = scene.status.followers.slice(count).map(({ state }) => state);
  const tally = [...new Set(hidden)].map((state) => `${hidden.filter((s) => s === state).length} ${state}`).join(', ');
  return rows > 0 ? [...shown, [span(`      ${hidden.length} more: ${tally}`, 'dim')]] : [];
}

function title(scene: Scene, width: number): Line {
  const { status, dry, rig, selected, along } = scene;
  const fresh = contact(status.leader.reading_age_us);
  const names = status.followers.filter((_, f) => selected[f]).map(({ follower }) => follower);
  const all = names.length === status.followers.length;
  return fitted(
    [
      { line: [span('eidograph', 'dim')], matters: 0 },
      { line: [span(rig, 'strong')], matters: 6 },
      { line: [span(dry ? 'dry: nothing is sent' : '', 'held')], matters: 7 },
      { line: [span(`pace ${percent(status.pace)}`, status.pace < 1 ? 'held' : 'plain')], matters: 8 },
      { line: [span(along, 'strong')], matters: 7.5 },
      { line: [span(status.unison ? 'in unison' : '')], matters: 2 },
      { line: [span(fresh, status.leader.stale ? 'bad' : 'plain')], matters: status.leader.stale ? 9 : 3 },
      { line: [span(`keys: ${all ? 'all' : names.join(' ')}`, all ? 'dim' : 'strong')], matters: all ? 1 : 5 },
    ],
    width,
    3,
  );
}

function cautionLines(width: number, shapes: Shapes): readonly Line[] {
  return CAUTIONS.flatMap((text) => wrapped(text, width - 2)).map((text, i) => [
    span(i === 0 ? `${shapes.care} ` : '  ', 'held'),
    span(text, 'held'),
  ]);
}

/** What is as it should be is soon old news; what needs a hand stays longer. */
function freshOf({ messages, nowUs }: Scene): readonly Message[] {
  const fresh = messages.filter(
    ({ weight, atUs }) => nowUs - atUs < (weight === 'care' ? CARE_SHOWN_US : NOTE_SHOWN_US),
  );
  return fresh.slice(-MESSAGES_MAX);
}

function messageLines(fresh: readonly Message[], width: number, shapes: Shapes): readonly Line[] {
  return fresh.flatMap(({ text, weight, atUs, times }) => {
    const stamp = `${seconds(atUs).padStart(8)} `;
    const sign = weight === 'care' ? shapes.care : shapes.note;
    const again = times > 1 ? ` (${times} times)` : '';
    const room = width - stamp.length - 2;
    return wrapped(`${text}${again}`, room).map(
      (piece, i): Line => [
        span(i === 0 ? stamp : ' '.repeat(stamp.length), 'dim'),
        span(`${i === 0 ? sign : ' '} `, weight === 'care' ? 'held' : 'dim'),
        span(piece, weight === 'care' ? 'held' : 'plain'),
      ],
    );
  });
}
