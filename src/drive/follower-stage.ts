import { US_PER_MS, US_PER_S } from '../clock/clock.ts';
import type { Follower } from '../follower/follower.ts';
import { BLOCKS } from '../follower/reasons.ts';
import type { FollowerSpec } from '../follower/spec.ts';
import { type Aim, aim } from './aim.ts';
import { type Authority, authority, STAGGER_US } from './authority.ts';
import { ALL, type DriveEvent } from './events.ts';
import { jog } from './jog.ts';
import type { LeaderStage } from './leader-stage.ts';
import { outbox, type CommandKind } from './outbox.ts';
import type { Shared } from './shared.ts';
import type { Shares } from './shares.ts';
import { standing, type Standing } from './standing.ts';
import { Steering } from './steering.ts';

/** How a follower stands when the drive is made. */
export interface Start {
  /** What the first pulse will say, radians; null: the rest pose. */
  readonly poseRad: Float64Array | null;
  /** Do not ask for the operator's go, whatever the profile says. */
  readonly unasked: boolean;
  /** Its port is open, its servos have pulses and it joins at once: for `trace`. */
  readonly awake: boolean;
  /** Number of the board it hangs on: a board takes one command an event. */
  readonly board: number;
}

/** One follower's part of the drive: when it is told what. It is also the command it makes. */
export interface FollowerStage {
  readonly spec: FollowerSpec;
  readonly index: number;
  readonly board: number;
  readonly arm: Follower;
  readonly is: Readonly<Standing>;
  /** What `take` has just made. */
  readonly kind: CommandKind;
  /** Commands made so far. */
  readonly commands: number;
  /** Age of the newest reading when the last command was made, microseconds. */
  readonly readingAgeUs: number;
  /** Power or pulses are to be switched as soon as the port takes it. */
  switching(): boolean;
  /** Handles one event; true when a command is to go out now. */
  take(event: DriveEvent): boolean;
  /** The next instant at which it has something to do although nothing arrives; Infinity when there is none. */
  dueUs(): number;
  /** A bug of ours was caught: this follower ends where it stands, the others go on. */
  giveUp(): void;
}

/** A still arm is told where it is this often, so that a board with a watchdog of its own stays awake. */
const KEEP_ALIVE_US = 500 * US_PER_MS;
/** A reading this share of the period before the command is due is not made to wait. */
const EARLY_SHARE = 0.1;
/** A longer pause than this many periods is not made up for. */
const PERIODS_MAX = 2;

/** What all stages of one drive share. */
export interface DriveParts {
  readonly lead: LeaderStage;
  readonly common: Shared;
  readonly share: Shares;
}

/** A class, because its few hot methods run for every follower at every event: closures of 64 stages are 64 of each. */
class Stage implements FollowerStage {
  readonly spec: FollowerSpec;
  readonly index: number;
  readonly board: number;
  readonly arm: Follower;
  readonly is: Standing = standing();
  kind: CommandKind = 'move';
  commands = 0;
  readingAgeUs = Number.NaN;
  readonly #lead: LeaderStage;
  readonly #common: Shared;
  readonly #siblings: FollowerStage[];
  readonly #pending = outbox();
  readonly #aim: Aim;
  readonly #rule: Authority;
  readonly #steer: Steering;

  constructor(
    arm: Follower,
    index: number,
    { lead, common, share }: DriveParts,
    start: Start,
    siblings: FollowerStage[],
  ) {
    const { spec } = arm;
    const { is } = this;
    const pending = this.#pending;
    const jogging = jog(spec.servos.length);
    this.spec = spec;
    this.index = index;
    this.board = start.board;
    this.arm = arm;
    this.#lead = lead;
    this.#common = common;
    this.#siblings = siblings;
    this.#aim = aim(arm.governor.x);
    this.#rule = authority(is, index, arm, lead, common, { share, pending, jogging, unasked: start.unasked });
    this.#steer = new Steering(is, index, arm, lead, common, { share, jogging, aim: this.#aim, rule: this.#rule });
  }

  switching(): boolean {
    return this.#pending.some;
  }

  take(event: DriveEvent): boolean {
    const { is } = this;
    const { busy, taken } = this.#common;
    const fresh = this.#hear(event) || this.#lead.fresh;
    if (fresh) is.owed = true;
    this.#rule.weigh();
    // Several ports may become busy in one instant, and are told one by one: this board's own word may be yet to come.
    if (event.kind === 'blocked') return false;
    if (!is.present || busy[this.board] === 1 || taken[this.board] === 1) return false;
    // What switches an arm off waits for nobody's motion.
    if (this.#pending.some) return this.#emit(this.#pending.take());
    if (this.#siblings.length > 1 && this.#mustYield()) return false;
    if (is.state === 'waking') return this.#wake();
    return is.pulsed && this.#move(fresh);
  }

  dueUs(): number {
    const { is } = this;
    if (!is.present || this.#common.busy[this.board] === 1) return Number.POSITIVE_INFINITY;
    if (this.#pending.some) return this.#common.nowUs[0] as number;
    if (is.state === 'waking') return is.going ? is.nextPulseUs : Number.POSITIVE_INFINITY;
    if (!is.pulsed) return Number.POSITIVE_INFINITY;
    return is.lastUs + (is.owed || is.moving ? this.#periodUs() : KEEP_ALIVE_US);
  }

  giveUp(): void {
    this.#rule.giveUp();
  }

  /** True when it is told where to be. */
  #hear(event: DriveEvent): boolean {
    switch (event.kind) {
      case 'reading':
      case 'tick':
      case 'pose':
        return false;
      case 'target':
        if (event.follower !== this.index) return false;
        this.#aim.take(event);
        return true;
      case 'lead':
        this.#aim.stay(this.arm.governor.x);
        return false;
      case 'key':
        if (event.follower === ALL || event.follower === this.index) this.#rule.key(event);
        return false;
      case 'jog':
        if (event.follower === this.index) this.#rule.jog(event);
        return false;
      default:
        if (this.#common.boardOf[event.follower] === this.board) this.#rule.board(event);
        return false;
    }
  }

  #emit(kind: CommandKind): true {
    this.kind = kind;
    this.commands++;
    this.#common.taken[this.board] = 1;
    return true;
  }

  #wake(): boolean {
    const { is, arm } = this;
    const nowUs = this.#common.nowUs[0] as number;
    if (!is.going || nowUs < is.nextPulseUs) return false;
    arm.frame.pulsing++;
    arm.aim();
    // From this pulse, not from when it was due: a port that was blocked must not let two servos start at once.
    is.nextPulseUs = nowUs + STAGGER_US;
    is.lastUs = nowUs;
    if (arm.frame.pulsing === this.spec.servos.length) {
      is.pulsed = true;
      this.#rule.raise('awake');
    }
    return this.#emit('move');
  }

  /** A target of its own is awaited a little: a command made just before it came would be a period behind it. */
  #periodUs(): number {
    const { periodUs } = this.spec;
    return this.#lead.byTargets ? Math.round(periodUs * (1 + EARLY_SHARE)) : periodUs;
  }

  #move(early: boolean): boolean {
    const { is, arm } = this;
    const { nowUs, dtS } = this.#common;
    const { periodUs } = this.spec;
    const sinceUs = (nowUs[0] as number) - is.lastUs;
    if (sinceUs < (early ? periodUs * (1 - EARLY_SHARE) : this.#periodUs())) return false;
    if (!is.owed && !is.moving && sinceUs < KEEP_ALIVE_US) return false;
    is.owed = false;
    const gap = sinceUs > PERIODS_MAX * periodUs;
    // A jogged servo creeps: it neither needs braking nor is where its joint says.
    if (gap && is.moving && is.state !== 'jogging') {
      // It was on its way when its port stopped taking commands. Braking all the while is the one motion that is
      // short, keeps the acceleration limit over the gap, and needs no leap afterwards.
      if (sinceUs > this.#lead.kernel.spec.timeoutUs) is.blocks |= BLOCKS.contact;
      dtS[0] = sinceUs / US_PER_S;
      this.#steer.brake(dtS);
      is.owed = true;
    } else {
      dtS[0] = (gap ? PERIODS_MAX * periodUs : sinceUs) / US_PER_S;
      this.#steer.step(dtS);
    }
    if (arm.burden !== null) {
      // The whole pause counts here: a still arm that is told where it is twice a second warms all the same.
      dtS[0] = Math.min(sinceUs, KEEP_ALIVE_US) / US_PER_S;
      arm.burden.bear(arm.governor.x, is.moving, dtS);
    }
    is.lastUs = nowUs[0] as number;
    this.readingAgeUs = (nowUs[0] as number) - this.#lead.lastUs;
    return this.#emit('move');
  }

  /** Where a board is too slow for its followers, one that is switched off goes first, then the one that has waited longest. */
  #mustYield(): boolean {
    const mine = this.dueUs();
    for (const other of this.#siblings) if (other !== this && (other.switching() || other.dueUs() < mine)) return true;
    return false;
  }
}

/** @param siblings the stages made before on the same board; filled by `drive` as stages are made */
export function followerStage(
  arm: Follower,
  index: number,
  company: DriveParts,
  start: Start,
  siblings: FollowerStage[],
): FollowerStage {
  const { spec } = arm;
  const stage = new Stage(arm, index, company, start, siblings);
  if (start.poseRad !== null) arm.place(start.poseRad);
  arm.aim();
  if (start.awake) {
    const { is } = stage;
    is.present = true;
    is.pulsed = true;
    is.state = 'joining';
    is.meeting = spec.joinMeet === 'move';
    is.lastUs = (company.common.nowUs[0] as number) - spec.periodUs;
    arm.frame.pulsing = spec.servos.length;
    company.share.begin(index);
  }
  siblings.push(stage);
  return stage;
}
