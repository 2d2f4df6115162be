import { type Cancel, type Clock, US_PER_MS } from '../clock/clock.ts';
import type { Drive } from '../drive/drive.ts';
import type { DriveEvent } from '../drive/events.ts';
import type { Cast } from './cast.ts';
import { lateness, type Lateness } from './lateness.ts';
import { EVENT_CODES, type Row, type RowFollower } from './row.ts';

/** The drive a take plays on. */
export interface Stage {
  readonly drive: Drive;
  push(event: DriveEvent & { tUs: number }): void;
}

export interface PlayerOptions {
  readonly cast: Cast;
  /** `leader`: its poses go through the present profiles; `commands`: its angles, through the present limits. */
  readonly by: 'leader' | 'commands';
  /** 1 for each of the rig's leader joints that the take leads; the others stay in the hand. Only `by: leader`. */
  readonly posed: Uint8Array;
  /** Count-in once every arm stands where the take begins, microseconds. */
  readonly countInUs: number;
  readonly changed: (phase: Phase) => void;
  /** A mark of the take has been passed. */
  readonly passed?: (mark: string) => void;
}

/**
 * `easing`: arms go gently to where the take begins; `counting`: the count-in; `handed`: the hand leads in mid-play; `over`:
 * they are kept where it ended until it is stopped.
 */
export type Phase = 'easing' | 'counting' | 'playing' | 'handed' | 'over';

/** Plays a reel of rows: each event goes out stamped with the instant it was due, however late its timer fired. */
export interface Player {
  readonly is: Readonly<PlayerStanding>;
  /** How late events left. */
  readonly late: Lateness;
  /** The hand leads from now on while the take stands still; or the take again, from where it stood. */
  handOver(): void;
  stop(): void;
}

export interface PlayerStanding {
  phase: Phase;
  /** Of the reel, microseconds. */
  atUs: number;
  /** Left of the count-in, microseconds. */
  countUs: number;
  events: number;
}

/** An arm is told where to be at least this often, so that a still stretch of a take is no lost leader. */
const HEARTBEAT_US = 50 * US_PER_MS;

export function player(stage: Stage, clock: Clock, rows: Iterator<Row>, options: PlayerOptions): Player {
  const { drive } = stage;
  const { cast, by, posed } = options;
  const late = lateness();
  const is: PlayerStanding = { phase: 'easing', atUs: 0, countUs: options.countInUs, events: 0 };
  const byLeader = by === 'leader';
  const pose = { kind: 'pose' as const, tUs: 0, poseRad: new Float64Array(cast.leader.length).fill(Number.NaN) };
  const targets = drive.followers.map(({ index, spec }) => ({
    kind: 'target' as const,
    tUs: 0,
    follower: index,
    anglesRad: new Float64Array(spec.joints.length),
    speedsRadS: new Float64Array(spec.joints.length),
  }));
  let next: Row | null = null;
  let beganUs = 0;
  let countedUs = 0;
  let lastUs = 0;
  let cancel: Cancel = () => {};

  const lead = (toTake: boolean, tUs: number): void => {
    const none = new Uint8Array(posed.length);
    stage.push({ kind: 'lead', tUs, posed: toTake && byLeader ? posed : none, targets: toTake && !byLeader });
  };

  const pull = (): void => {
    const step = rows.next();
    next = step.done === true ? null : step.value;
  };

  /** Takes over what a row says; true when it says something to those who play. */
  const read = (row: Row): boolean => {
    if (byLeader) {
      const isPose =
        row.event === EVENT_CODES.reading || row.event === EVENT_CODES.pose || row.event === EVENT_CODES.blend;
      if (!isPose) return false;
      for (let j = 0; j < cast.leader.length; j++) pose.poseRad[j] = row.poseRad[cast.leader[j] as number] as number;
      return !pose.poseRad.includes(Number.NaN);
    }
    let some = false;
    for (let f = 0; f < targets.length; f++) some = readTarget(row, f, false) || some;
    return some;
  };

  const readTarget = (row: Row, f: number, anyway: boolean): boolean => {
    const part = cast.followers[f] ?? null;
    const arm = part === null ? undefined : (row.followers[part.follower] as RowFollower);
    const fresh = arm !== undefined && (anyway || arm.commanded === 1);
    spoken[f] = fresh ? 1 : 0;
    if (!fresh || part === null) return false;
    const target = targets[f] as (typeof targets)[number];
    for (let j = 0; j < part.joints.length; j++) {
      target.anglesRad[j] = arm.angleRad[part.joints[j] as number] as number;
      target.speedsRadS[j] = arm.speedRadS[part.joints[j] as number] as number;
    }
    return true;
  };
  const spoken = new Uint8Array(targets.length);

  const speak = (tUs: number): void => {
    lastUs = tUs;
    is.events++;
    if (byLeader) {
      pose.tUs = tUs;
      stage.push(pose);
      return;
    }
    for (let f = 0; f < targets.length; f++) {
      if (spoken[f] === 0) continue;
      const target = targets[f] as (typeof targets)[number];
      target.tUs = tUs;
      stage.push(target);
    }
  };

  /** Says again what was said last, standing: the take is waiting. */
  const repeat = (tUs: number): void => {
    for (let f = 0; f < targets.length; f++) {
      spoken[f] = cast.followers[f] === null ? 0 : 1;
      targets[f]?.speedsRadS.fill(0);
    }
    speak(tUs);
  };

  const enter = (phase: Phase): void => {
    if (is.phase === phase) return;
    is.phase = phase;
    options.changed(phase);
  };

  /** What stays in the hand never stands quite still. */
  const mayMove = byLeader && posed.includes(0);

  /** Everybody who has a part stands where the take begins. */
  const isReady = (): boolean => {
    const playing = drive.followers.filter((_, f) => byLeader || cast.followers[f] !== null);
    return playing.length > 0 && playing.every(({ is: arm }) => arm.state === 'following' && (mayMove || !arm.moving));
  };

  const wait = (nowUs: number): void => {
    // The last repeat before playing is a heartbeat old: commands then come with the take's own instants.
    if (is.phase === 'easing' || nowUs < countedUs) repeat(nowUs);
    if (is.phase === 'easing' && isReady()) {
      countedUs = nowUs + options.countInUs;
      enter('counting');
    }
    if (is.phase === 'counting') {
      // Whoever stops or holds during the count-in begins it anew.
      if (!isReady()) enter('easing');
      is.countUs = Math.max(0, countedUs - nowUs);
      if (is.phase === 'counting' && nowUs >= countedUs) {
        beganUs = nowUs - is.atUs;
        enter('playing');
      }
    }
  };

  const play = (nowUs: number): void => {
    while (next !== null && beganUs + next.tUs <= nowUs) {
      const dueUs = beganUs + next.tUs;
      is.atUs = next.tUs;
      if (next.name !== '') options.passed?.(next.name);
      if (read(next)) {
        speak(dueUs);
        late.add(clock.nowUs() - dueUs);
      }
      pull();
    }
    if (next === null) finish(nowUs);
    else if (nowUs - lastUs >= HEARTBEAT_US) repeat(nowUs);
  };

  const finish = (nowUs: number): void => {
    repeat(nowUs);
    enter('over');
  };

  const turn = (): void => {
    const nowUs = clock.nowUs();
    if (is.phase === 'easing' || is.phase === 'counting') wait(nowUs);
    if (is.phase === 'playing') play(nowUs);
    else if (is.phase === 'over') repeat(nowUs);
    if (is.phase === 'handed') return;
    const soonUs = nowUs + HEARTBEAT_US;
    const dueUs = is.phase === 'playing' && next !== null ? Math.min(beganUs + next.tUs, soonUs) : soonUs;
    cancel = clock.at(dueUs, turn);
  };

  // The first row that says where to be.
  pull();
  while (next !== null && !(byLeader ? read(next) : begins(next))) pull();
  function begins(row: Row): boolean {
    return cast.followers.every((part, f) => part === null || readTarget(row, f, true));
  }
  lead(true, clock.nowUs());
  turn();

  return {
    is,
    late,
    handOver() {
      const nowUs = clock.nowUs();
      if (is.phase === 'handed') {
        lead(true, nowUs);
        is.phase = 'easing';
        options.changed('easing');
        turn();
        return;
      }
      if (is.phase === 'over') return;
      cancel();
      lead(false, nowUs);
      enter('handed');
    },
    stop() {
      cancel();
      enter('over');
    },
  };
}
