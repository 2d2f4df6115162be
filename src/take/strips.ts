import { US_PER_MS, US_PER_S } from '../clock/clock.ts';
import { runsOf, trace, type Trace, widen } from '../draw/strip-columns.ts';
import { type ShadedRun, STRIP_COLUMNS, type Strip, type StripGroup, type StripSheet } from '../draw/strip-sheet.ts';
import { LIMITS } from '../follower/reasons.ts';
import { STATES } from '../follower/states.ts';
import type { TakeFollower } from './header.ts';
import type { Take } from './reader.ts';
import { EVENT_CODES, type Row, type RowFollower, STATE_CODES } from './row.ts';
import { DROPOUT_US } from './summary.ts';

const DEG = 180 / Math.PI;
/** Rows between two looks at whether somebody wants it to end. */
const ROWS_A_STEP = 20_000;

/** What of `LIMITS` is drawn as what. A deadband holds nothing back that anybody sees. */
const LIMITS_SHOWN = {
  clipped: LIMITS.range | LIMITS.reach,
  limited: LIMITS.speed | LIMITS.end_speed | LIMITS.keep_out | LIMITS.load,
  held: LIMITS.sick,
} as const;
/** A line is broken where an arm had no command for so long. */
const COMMANDS_APART_US = 250 * US_PER_MS;
/** In these an arm does what the leader asks, or is on its way there. */
const LED: readonly number[] = [STATE_CODES.following, STATE_CODES.joining];
/** Before a follower's first row. */
const NONE = 255;

/**
 * A take as strips, one for each joint over time. Reads it once; memory is bounded by the columns of the sheet, whatever the
 * take's length. Yields the share of its rows read.
 * @param only names of followers; empty: all of them
 */
export function* strips(take: Take, only: readonly string[]): Generator<number, StripSheet> {
  const { header, durationUs } = take;
  const columnUs = Math.max(durationUs, 1) / STRIP_COLUMNS;
  const columnOf = (tUs: number): number => Math.min(STRIP_COLUMNS - 1, Math.floor(tUs / columnUs));
  const leader = leaderStrips(header.leader.joints, columnUs, columnOf);
  const arms = header.followers.flatMap((follower, f) =>
    only.length === 0 || only.includes(follower.name) ? [{ f, strips: armStrips(follower, columnUs, columnOf) }] : [],
  );
  let rows = 0;
  for (const row of take.readFrom(0)) {
    leader.push(row);
    for (const arm of arms) arm.strips.push(row, row.followers[arm.f] as RowFollower);
    rows++;
    if (rows % ROWS_A_STEP === 0) yield rows / take.rows;
  }
  return {
    title: take.name,
    subtitle: subtitleOf(take),
    durationS: durationUs / US_PER_S,
    marks: take.marks.map(({ name, tUs }) => ({ name, atS: tUs / US_PER_S })),
    groups: [leader.end(`leader ${header.leader.name}`), ...arms.map((arm) => arm.strips.end())],
  };
}

function subtitleOf({ header, durationUs, rows, lostBytes }: Take): string {
  const { by, parents } = header.made;
  const made = parents.length === 0 ? 'recorded' : `${by} of ${parents.map(({ take }) => take).join(' and ')}`;
  const cut = lostBytes === null ? '' : '; it was cut off at its end';
  return `${made} from ${header.rig}, ${(durationUs / US_PER_S).toFixed(2)} s, ${rows} rows; degrees${cut}`;
}

type ColumnOf = (tUs: number) => number;

const apartAt = (us: number, columnUs: number): number => Math.ceil(us / columnUs) + 1;

function stand(columns: Uint8Array, from: number, to: number, bits: number): void {
  if (bits !== 0) for (let column = from; column <= to; column++) columns[column] = (columns[column] as number) | bits;
}

function leaderStrips(
  joints: readonly string[],
  columnUs: number,
  columnOf: ColumnOf,
): { push(row: Row): void; end(title: string): StripGroup } {
  const angles = joints.map((): Trace => trace(STRIP_COLUMNS, apartAt(DROPOUT_US, columnUs)));
  const dropouts = new Uint8Array(STRIP_COLUMNS);
  let lastUs = 0;
  const silentUpTo = (tUs: number): void => {
    if (tUs - lastUs > DROPOUT_US) stand(dropouts, columnOf(lastUs), columnOf(tUs), 1);
    lastUs = tUs;
  };
  return {
    push({ event, tUs, poseRad }) {
      if (event !== EVENT_CODES.reading && event !== EVENT_CODES.pose && event !== EVENT_CODES.blend) return;
      silentUpTo(tUs);
      const column = columnOf(tUs);
      for (let j = 0; j < angles.length; j++) widen(angles[j] as Trace, column, (poseRad[j] as number) * DEG);
    },
    end(title) {
      silentUpTo(STRIP_COLUMNS * columnUs);
      const shaded = runsOf(dropouts, 1).map((run): ShadedRun => ({ ...run, shade: 'dropout', word: 'no readings' }));
      return {
        title,
        lane: null,
        strips: joints.map((joint, j): Strip => {
          const angle = angles[j] as Trace;
          return { title: joint, range: null, target: null, angle, shaded };
        }),
      };
    },
  };
}

function armStrips(
  { name, joints }: TakeFollower,
  columnUs: number,
  columnOf: ColumnOf,
): { push(row: Row, arm: RowFollower): void; end(): StripGroup } {
  const apart = apartAt(COMMANDS_APART_US, columnUs);
  const targets = joints.map((): Trace => trace(STRIP_COLUMNS, apart));
  const angles = joints.map((): Trace => trace(STRIP_COLUMNS, apart));
  const limits = joints.map(() => new Uint8Array(STRIP_COLUMNS));
  const states = new Uint8Array(STRIP_COLUMNS).fill(NONE);
  const unled = new Uint8Array(STRIP_COLUMNS);
  const nowLimits = new Uint8Array(joints.length);
  let state = NONE;
  let stateColumn = 0;
  let commandColumn = 0;

  /** What has been so since its first column is so up to this one. */
  const standUpTo = (column: number): void => {
    if (state === NONE) return;
    states.fill(state, stateColumn, column + 1);
    if (!LED.includes(state)) stand(unled, stateColumn, column, 1);
    stateColumn = column;
  };
  const limitedUpTo = (column: number): void => {
    for (let j = 0; j < limits.length; j++)
      stand(limits[j] as Uint8Array, commandColumn, column, nowLimits[j] as number);
    commandColumn = column;
  };

  return {
    push({ tUs }, arm) {
      const column = columnOf(tUs);
      if (column !== stateColumn || arm.state !== state) standUpTo(column);
      state = arm.state;
      stateColumn = column;
      if (arm.commanded === 0) return;
      limitedUpTo(column);
      nowLimits.set(arm.limits);
      for (let j = 0; j < joints.length; j++) {
        widen(targets[j] as Trace, column, (arm.targetRad[j] as number) * DEG);
        widen(angles[j] as Trace, column, (arm.angleRad[j] as number) * DEG);
      }
    },
    end() {
      standUpTo(STRIP_COLUMNS - 1);
      const held = runsOf(unled, 1).map((run): ShadedRun => ({ ...run, shade: 'held', word: 'not following' }));
      return {
        title: name,
        lane: laneOf(states),
        strips: joints.map(
          (joint, j): Strip => ({
            title: joint.name,
            range: [joint.minRad * DEG, joint.maxRad * DEG],
            target: targets[j] as Trace,
            angle: angles[j] as Trace,
            shaded: [...held, ...limitedRuns(limits[j] as Uint8Array)],
          }),
        ),
      };
    },
  };
}

/** Each stretch in which limits held a joint back, with their names. */
function limitedRuns(columns: Uint8Array): readonly ShadedRun[] {
  return (['clipped', 'limited', 'held'] as const).flatMap((shade) =>
    runsOf(columns, LIMITS_SHOWN[shade]).map((run): ShadedRun => {
      const met = columns.slice(run.from, run.to).reduce((bits, each) => bits | each, 0) & LIMITS_SHOWN[shade];
      const words = Object.entries(LIMITS).flatMap(([word, bit]) => ((met & bit) === 0 ? [] : [limitWord(word)]));
      return { ...run, shade, word: words.join(', ') };
    }),
  );
}

/** Where a limit's name is not yet a word for people. */
const WORDS: Readonly<Record<string, string>> = { end_speed: 'end speed', keep_out: 'keep-out', sick: 'sick pot' };

/** What people call one of `LIMITS`. */
export function limitWord(limit: string): string {
  return WORDS[limit] ?? limit;
}

function laneOf(states: Uint8Array): StripGroup['lane'] {
  const runs: { from: number; to: number; word: string }[] = [];
  states.forEach((state, column) => {
    const word = STATES[state] ?? '';
    const last = runs.at(-1);
    if (last?.word === word && last.to === column) last.to = column + 1;
    else if (word !== '') runs.push({ from: column, to: column + 1, word });
  });
  return runs;
}
