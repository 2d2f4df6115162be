import { US_PER_MS, US_PER_S } from '../clock/clock.ts';
import type { Follower } from '../follower/follower.ts';
import { BLOCKS } from '../follower/reasons.ts';
import type { FollowerSpec } from '../follower/spec.ts';
import { authority, STAGGER_US } from './authority.ts';
import { ALL, type DriveEvent, type TargetEvent } from './events.ts';
import { jog } from './jog.ts';
import type { LeaderStage } from './leader-stage.ts';
import { outbox, type CommandKind } from './outbox.ts';
import type { Shared } from './shared.ts';
import type { Shares } from './shares.ts';
import { standing, type Standing } from './standing.ts';
import { steering } from './steering.ts';

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

/** @param siblings the stages made before on the same board; filled by `drive` as stages are made */
export function followerStage(
  arm: Follower,
  index: number,
  lead: LeaderStage,
  common: Shared,
  share: Shares,
  start: Start,
  siblings: FollowerStage[],
): FollowerStage {
  const { spec } = arm;
  const is = standing();
  const pending = outbox();
  const jogging = jog(spec.servos.length);
  const rule = authority(is, index, arm, lead, common, { share, pending, jogging, unasked: start.unasked });
  const aim = {
    atUs: Number.NEGATIVE_INFINITY,
    anglesRad: arm.governor.x.slice(),
    speedsRadS: new Float64Array(spec.joints.length),
  };
  const steer = steering(is, index, arm, lead, common, {
    share,
    jogging,
    aim,
    raise: rule.raise,
    cutPower: rule.cutPower,
  });
  const { nowUs: now, dtS } = common;

  const emit = (kind: CommandKind): true => {
    self.kind = kind;
    self.commands++;
    common.taken[start.board] = 1;
    return true;
  };

  /** What is no number moves nothing. */
  const takeAim = ({ tUs, anglesRad, speedsRadS }: TargetEvent): void => {
    for (let j = 0; j < spec.joints.length; j++) {
      if (!Number.isFinite(anglesRad[j]) || !Number.isFinite(speedsRadS[j])) continue;
      aim.anglesRad[j] = anglesRad[j] as number;
      aim.speedsRadS[j] = speedsRadS[j] as number;
    }
    aim.atUs = tUs;
  };

  const wake = (): boolean => {
    if (!is.going || (now[0] as number) < is.nextPulseUs) return false;
    arm.frame.pulsing++;
    arm.aim();
    // From this pulse, not from when it was due: a port that was blocked must not let two servos start at once.
    is.nextPulseUs = (now[0] as number) + STAGGER_US;
    is.lastUs = now[0] as number;
    if (arm.frame.pulsing === spec.servos.length) {
      is.pulsed = true;
      rule.raise('awake');
    }
    return emit('move');
  };

  /** A target of its own is awaited a little: a command made just before it came would be a period behind it. */
  const periodNowUs = (): number => (lead.byTargets ? Math.round(spec.periodUs * (1 + EARLY_SHARE)) : spec.periodUs);

  const move = (early: boolean): boolean => {
    const sinceUs = (now[0] as number) - is.lastUs;
    if (sinceUs < (early ? spec.periodUs * (1 - EARLY_SHARE) : periodNowUs())) return false;
    if (!is.owed && !is.moving && sinceUs < KEEP_ALIVE_US) return false;
    is.owed = false;
    const gap = sinceUs > PERIODS_MAX * spec.periodUs;
    // A jogged servo creeps: it neither needs braking nor is where its joint says.
    if (gap && is.moving && is.state !== 'jogging') {
      // It was on its way when its port stopped taking commands. Braking all the while is the one motion that is
      // short, keeps the acceleration limit over the gap, and needs no leap afterwards.
      if (sinceUs > lead.kernel.spec.timeoutUs) is.blocks |= BLOCKS.contact;
      dtS[0] = sinceUs / US_PER_S;
      steer.brake(dtS);
      is.owed = true;
    } else {
      dtS[0] = (gap ? PERIODS_MAX * spec.periodUs : sinceUs) / US_PER_S;
      steer.step(dtS);
    }
    if (arm.burden !== null) {
      // The whole pause counts here: a still arm that is told where it is twice a second warms all the same.
      dtS[0] = Math.min(sinceUs, KEEP_ALIVE_US) / US_PER_S;
      arm.burden.bear(arm.governor.x, is.moving, dtS);
    }
    is.lastUs = now[0] as number;
    self.readingAgeUs = (now[0] as number) - lead.lastUs;
    return emit('move');
  };

  /** Where a board is too slow for its followers, one that is switched off goes first, then the one that has waited longest. */
  const mustYield = (): boolean => {
    const mine = self.dueUs();
    for (const other of siblings) if (other !== self && (other.switching() || other.dueUs() < mine)) return true;
    return false;
  };

  /** True when it is told where to be. */
  const hear = (event: DriveEvent): boolean => {
    switch (event.kind) {
      case 'reading':
      case 'tick':
      case 'pose':
        return false;
      case 'target':
        if (event.follower !== index) return false;
        takeAim(event);
        return true;
      case 'lead':
        aim.anglesRad.set(arm.governor.x);
        aim.speedsRadS.fill(0);
        return false;
      case 'key':
        if (event.follower === ALL || event.follower === index) rule.key(event);
        return false;
      case 'jog':
        if (event.follower === index) rule.jog(event);
        return false;
      default:
        if (common.boardOf[event.follower] === start.board) rule.board(event);
        return false;
    }
  };

  const self: { -readonly [K in keyof FollowerStage]: FollowerStage[K] } = {
    spec,
    index,
    board: start.board,
    arm,
    is,
    kind: 'move',
    commands: 0,
    readingAgeUs: Number.NaN,
    switching: () => pending.some,
    take(event) {
      const fresh = hear(event) || lead.fresh;
      if (fresh) is.owed = true;
      rule.weigh();
      // Several ports may become busy in one instant, and are told one by one: this board's own word may be yet to come.
      if (event.kind === 'blocked') return false;
      if (!is.present || common.busy[start.board] === 1 || common.taken[start.board] === 1) return false;
      // What switches an arm off waits for nobody's motion.
      if (pending.some) return emit(pending.take());
      if (siblings.length > 1 && mustYield()) return false;
      if (is.state === 'waking') return wake();
      return is.pulsed && move(fresh);
    },
    dueUs() {
      if (!is.present || common.busy[start.board] === 1) return Number.POSITIVE_INFINITY;
      if (pending.some) return now[0] as number;
      if (is.state === 'waking') return is.going ? is.nextPulseUs : Number.POSITIVE_INFINITY;
      if (!is.pulsed) return Number.POSITIVE_INFINITY;
      return is.lastUs + (is.owed || is.moving ? periodNowUs() : KEEP_ALIVE_US);
    },
    giveUp: rule.giveUp,
  };

  if (start.poseRad !== null) arm.place(start.poseRad);
  arm.aim();
  if (start.awake) {
    is.present = true;
    is.pulsed = true;
    is.state = 'joining';
    is.meeting = spec.joinMeet === 'move';
    is.lastUs = (now[0] as number) - spec.periodUs;
    arm.frame.pulsing = spec.servos.length;
    share.begin(index);
  }
  siblings.push(self);
  return self;
}
