import { STAGGER_US } from '../../src/drive/authority.ts';
import { drive, type Drive } from '../../src/drive/drive.ts';
import { ALL, type BoardEvent, type DriveEvent, type Key, LEADER } from '../../src/drive/events.ts';
import type { FollowerStage, Start } from '../../src/drive/follower-stage.ts';
import type { CommandKind } from '../../src/drive/outbox.ts';
import type { Plan } from '../../src/drive/plan.ts';
import type { State } from '../../src/follower/states.ts';
import { countsAt, DEG, MS } from '../plans.ts';
import { take } from './fold.ts';

/** One command, copied out of the drive as its port took it. */
export interface Told {
  readonly tUs: number;
  readonly follower: number;
  readonly kind: CommandKind;
  /** State right after the command was made. */
  readonly state: State;
  readonly anglesRad: Float64Array;
  readonly pulsesUs: Float64Array;
  readonly pulsing: number;
  /** It is a servo's first pulse. */
  readonly waking: boolean;
  /** The arm does not stand at the end of it. */
  readonly moving: boolean;
}

/** One event, copied, with what it left. */
export interface Happened {
  readonly event: DriveEvent;
  /** A command brought it about: it is no event from outside. */
  readonly caused: boolean;
  /** State of each follower right after it. */
  readonly states: readonly State[];
  /** Commands told up to and with it. */
  readonly told: number;
}

/** A time for each byte pipe: how long its board is busy with one command; 0 takes everything at once. */
export interface RehearsalOptions {
  readonly starts?: readonly Partial<Start>[];
  readonly busyUs?: number;
}

const READ_EVERY_US = 10 * MS;
const TICKS_MAX = 1_000;

/**
 * A drive on a stage without boards: events by hand, due ticks by themselves, commands kept. Nothing of RxJS, so that
 * the fold is proved alone.
 */
export class Rehearsal {
  readonly drive: Drive;
  readonly told: Told[] = [];
  /** Every event as delivered, ticks included. */
  readonly happened: Happened[] = [];
  nowUs = 0;
  /** What a take leads. */
  led: { readonly posed: Uint8Array; readonly targets: boolean } = { posed: new Uint8Array(0), targets: false };
  /** What the leader's inputs read: joints in degrees turned into counts, buttons as they are. */
  #counts: number[];
  readonly #busyUs: number;
  /** For each board, when it is free again; Infinity: it is. */
  readonly #freeUs: number[];
  readonly #boardOf: number[];

  constructor(plan: Plan, options: RehearsalOptions = {}) {
    const starts = plan.followers.map(
      (_, f): Start => ({ poseRad: null, unasked: false, awake: false, board: f, ...options.starts?.[f] }),
    );
    this.drive = drive(plan, starts, 0);
    this.#counts = [...plan.leader.joints, ...plan.leader.buttons].map((_, i) =>
      i < plan.leader.joints.length ? countsAt(0) : 900,
    );
    this.#busyUs = options.busyUs ?? 0;
    this.#boardOf = starts.map((s) => s.board);
    this.#freeUs = this.#boardOf.map(() => Number.POSITIVE_INFINITY);
  }

  /** Delivers one event after the ticks due before it, and before those due at it. */
  deliver(event: DriveEvent): this {
    this.#tickBefore(event.tUs);
    this.#take(event);
    this.#tickBefore(event.tUs + 1);
    return this;
  }

  /** Lets time pass. What is due at the end of it waits for the event that may come at that instant. */
  run(forUs: number): this {
    const untilUs = this.nowUs + forUs;
    this.#tickBefore(untilUs);
    this.nowUs = untilUs;
    return this;
  }

  /** Sets what the leader's joints read from now on, in degrees. */
  pose(...anglesDeg: number[]): this {
    anglesDeg.forEach((deg, j) => (this.#counts[j] = countsAt(deg)));
    return this;
  }

  /** Sets what one of the leader's joints reads from now on, in degrees. */
  joint(j: number, angleDeg: number): this {
    return this.input(j, countsAt(angleDeg));
  }

  /** Sets what one input reads from now on. */
  input(index: number, counts: number): this {
    this.#counts[index] = counts;
    return this;
  }

  reads(): this {
    return this.deliver({ kind: 'reading', tUs: this.nowUs, counts: Float64Array.from(this.#counts) });
  }

  /** Readings every 10 ms, with joint angles by the time since it began; runs on for `forUs`. */
  plays(forUs: number, anglesDeg: (tS: number) => readonly number[] = () => [], everyUs = READ_EVERY_US): this {
    const startUs = this.nowUs;
    for (let us = 0; us < forUs; us += everyUs) {
      this.pose(...anglesDeg(us / 1e6)).reads();
      this.run(Math.min(everyUs, forUs - us));
    }
    return this.run(startUs + forUs - this.nowUs);
  }

  key(key: Key, follower = ALL, value = 0): this {
    return this.deliver({ kind: 'key', tUs: this.nowUs, key, follower, value });
  }

  board(kind: BoardEvent['kind'], follower = 0, kept = false): this {
    return this.deliver({ kind, tUs: this.nowUs, follower, kept });
  }

  /** Opens the leader's port and every follower's. */
  ready(): this {
    this.board('ready', LEADER);
    for (const board of new Set(this.#boardOf)) this.board('ready', this.#boardOf.indexOf(board));
    return this;
  }

  /** The same, but for boards whose arms started awake. */
  readyUnlessAwake(): this {
    this.board('ready', LEADER);
    this.drive.followers.forEach((stage, f) => {
      if (!stage.is.present) this.board('ready', f);
    });
    return this;
  }

  /** Opens every port and follows a leader that lies still, until each follower has met it. */
  following(): this {
    this.ready().plays(3e6);
    for (const stage of this.drive.followers)
      if (stage.is.state !== 'following') throw new Error(`${stage.spec.name} is ${stage.is.state}`);
    return this;
  }

  jog(servo: number, pulseUs: number, follower = 0): this {
    return this.deliver({ kind: 'jog', tUs: this.nowUs, follower, servo, pulseUs });
  }

  stage(follower = 0): FollowerStage {
    return this.drive.followers[follower] as FollowerStage;
  }

  state(follower = 0): State {
    return this.stage(follower).is.state;
  }

  anglesDeg(follower = 0): number[] {
    return [...this.stage(follower).arm.governor.x].map((rad) => rad / DEG);
  }

  speedsDegS(follower = 0): number[] {
    return [...this.stage(follower).arm.governor.v].map((rad) => rad / DEG);
  }

  /** Commands of one follower from `fromUs` on. */
  commands(follower = 0, fromUs = 0): Told[] {
    return this.told.filter((told) => told.follower === follower && told.tUs >= fromUs);
  }

  #take(event: DriveEvent, isCaused = false): void {
    this.nowUs = event.tUs;
    if (event.kind === 'lead') this.led = event;
    const caused: number[] = [];
    take(this.drive, event, (command) => {
      this.#keep(command);
      if (this.#busyUs > 0) caused.push(command.board);
    });
    this.happened.push({
      event: event.kind === 'reading' ? { ...event, counts: event.counts.slice() } : { ...event },
      caused: isCaused,
      states: this.drive.followers.map((f) => f.is.state),
      told: this.told.length,
    });
    for (const board of caused) {
      this.#freeUs[board] = this.nowUs + this.#busyUs;
      this.#boardSays('blocked', board);
    }
  }

  #boardSays(kind: 'blocked' | 'free', board: number): void {
    this.#take({ kind, tUs: this.nowUs, follower: this.#boardOf.indexOf(board), kept: false }, kind === 'blocked');
  }

  #keep({ index, kind, is, arm }: FollowerStage): void {
    this.told.push({
      tUs: this.nowUs,
      follower: index,
      kind,
      state: is.state,
      anglesRad: arm.governor.x.slice(),
      pulsesUs: arm.frame.pulsesUs.slice(),
      pulsing: arm.frame.pulsing,
      waking: is.nextPulseUs === this.nowUs + STAGGER_US,
      moving: is.moving,
    });
  }

  /** Ticks and boards that come free, in order of time, strictly before `endUs`. */
  #tickBefore(endUs: number): void {
    let atOnce = 0;
    for (;;) {
      const dueUs = Math.max(this.drive.dueUs(), this.nowUs);
      const freeUs = Math.min(...this.#freeUs, Number.POSITIVE_INFINITY);
      const nextUs = Math.min(dueUs, freeUs);
      if (nextUs >= endUs) return;
      atOnce = nextUs > this.nowUs ? 0 : atOnce + 1;
      if (atOnce > TICKS_MAX) throw new Error('the drive asks for ticks without end');
      if (freeUs <= dueUs) {
        const board = this.#freeUs.indexOf(freeUs);
        this.#freeUs[board] = Number.POSITIVE_INFINITY;
        this.nowUs = freeUs;
        this.#boardSays('free', board);
      } else this.#take({ kind: 'tick', tUs: nextUs });
    }
  }
}
