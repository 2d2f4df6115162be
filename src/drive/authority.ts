import { US_PER_MS } from '../clock/clock.ts';
import type { Follower } from '../follower/follower.ts';
import { BLOCKS } from '../follower/reasons.ts';
import { nextState, type State, type StateEvent } from '../follower/states.ts';
import type { BoardEvent, JogEvent, KeyEvent } from './events.ts';
import type { Jog } from './jog.ts';
import type { LeaderStage } from './leader-stage.ts';
import type { Outbox } from './outbox.ts';
import type { Shared } from './shared.ts';
import type { Shares } from './shares.ts';
import { BACK_US, type Standing } from './standing.ts';

/** Who may move the arm: turns keys, port changes and levels into the state table's events, and does what a change entails. */
export interface Authority {
  key(event: KeyEvent): void;
  board(event: BoardEvent): void;
  jog(event: JogEvent): void;
  /** Weighs what keeps the arm from following; after every event and before any command. */
  weigh(): void;
  raise(event: StateEvent): void;
  /** Ends pulses and power: the second half of a category 1 stop. */
  cutPower(): void;
  /** A bug of ours: this follower is given up where it stands, for the rest of the run. */
  giveUp(): void;
}

/** Pause between first pulses: every servo draws its stall current as it starts. */
export const STAGGER_US = 100 * US_PER_MS;

/** Blocks that last until somebody takes them back; the others are weighed anew at each event. */
const LATCHED = BLOCKS.held | BLOCKS.contact | BLOCKS.fault;

export function authority(
  is: Standing,
  index: number,
  arm: Follower,
  lead: LeaderStage,
  common: Shared,
  parts: { readonly share: Shares; readonly pending: Outbox; readonly jogging: Jog; readonly unasked: boolean },
): Authority {
  const { share, pending, jogging } = parts;
  const spec = arm.spec;
  const motion = arm.governor;
  const now = common.nowUs;
  const board = common.boardOf[index] as number;
  /**
   * An arm that has had pulses in this run and lost them has sunk since, nobody knows where to: whatever its profile
   * says, it waits for the go, unless there is nobody to give one. A limp arm was parked, and go is what wakes it.
   */
  const wakesByItself = (event: StateEvent): boolean =>
    parts.unasked || (spec.wake !== 'ask' && (event === 'go' || is.lastUs === Number.NEGATIVE_INFINITY));
  let healthSeen = -1;
  let leadSeen = 0;

  const raise = (event: StateEvent): void => {
    const next = nextState(is.state, event);
    if (next !== is.state) enter(next, event);
  };

  const enter = (next: State, event: StateEvent): void => {
    leaveUnfinished(next);
    is.state = next;
    is.owed = true;
    common.following[index] = next === 'following' ? 1 : 0;
    switch (next) {
      case 'absent':
        is.downUs = now[0] as number;
        return;
      case 'waking':
        standStill();
        arm.frame.pulsing = 0;
        is.going = false;
        // What was latched, or made limp, stays so until somebody asks: a port that comes back is nobody.
        if (wakesByItself(event) && (is.blocks & BLOCKS.held) === 0) startWaking();
        return;
      case 'joining':
        arm.settleHere();
        share.begin(index);
        is.meeting = spec.joinMeet === 'move';
        return;
      case 'following':
        share.meet(index);
        return;
      case 'holding':
        if (event === 'jogged') is.blocks |= BLOCKS.held;
        return;
      case 'parking':
        share.begin(index);
        letClutchIn();
        return;
      case 'limp':
        endPulses();
        return;
      case 'stopped':
        letClutchIn();
        // An arm without its pulses, in the midst of waking, has nothing to brake first.
        if (spec.stopCategory === 0 || (spec.stopCategory === 1 && !is.pulsed)) cutPower();
        return;
      case 'jogging':
        return;
    }
  };

  /**
   * What was broken off is not finished by itself: an arm that was parking holds, and a servo that was being jogged does
   * not stand where its joint says, so the arm has to be woken again.
   */
  const leaveUnfinished = (next: State): void => {
    if (is.state === 'parking' && (next === 'absent' || next === 'holding')) is.blocks |= BLOCKS.held;
    if (is.state !== 'jogging' || next === 'holding') return;
    jogging.forget();
    is.pulsed = false;
    standStill();
  };

  const standStill = (): void => {
    motion.v.fill(0);
    is.moving = false;
  };

  const letClutchIn = (): void => {
    is.clutchKey = false;
    arm.clutchRad.fill(0);
  };

  const startWaking = (): void => {
    is.going = true;
    is.nextPulseUs = Math.max(now[0] as number, common.inrushFreeUs[0] as number);
    common.inrushFreeUs[0] = is.nextPulseUs + STAGGER_US * spec.servos.length;
    if (spec.hasPower) pending.ask('power_on');
  };

  const endPulses = (): void => {
    pending.ask('limp');
    is.pulsed = false;
    is.blocks |= BLOCKS.held;
    standStill();
  };

  const cutPower = (): void => {
    if (spec.hasPower) pending.ask('power_off');
    endPulses();
  };

  const go = (): void => {
    is.blocks &= ~(BLOCKS.held | BLOCKS.contact);
    if (is.state === 'waking' && !is.going) startWaking();
    else raise(is.state === 'limp' ? 'go' : 'join');
  };

  const park = (limpAfter: boolean): void => {
    is.limpAfterPark = limpAfter;
    const standsAtRest = is.state === 'holding' && !is.moving && arm.atRest();
    if (limpAfter && (is.state === 'waking' || standsAtRest)) {
      raise('limp');
      return;
    }
    is.blocks &= ~(BLOCKS.held | BLOCKS.contact);
    is.parkStale = lead.stale;
    raise('park');
  };

  const noteHealth = (): void => {
    healthSeen = lead.healthVersion;
    is.owed = true;
    if (arm.hold(lead.kernel.health.state)) raise('healed');
  };

  return {
    raise,
    cutPower,
    key(event) {
      is.owed = true;
      switch (event.key) {
        case 'go':
          return go();
        case 'join':
          is.blocks &= ~(BLOCKS.held | BLOCKS.contact);
          return raise('join');
        case 'hold':
          is.blocks |= BLOCKS.held;
          if (is.state === 'jogging') jogging.stay();
          return;
        case 'park':
          return park(false);
        case 'limp':
          return park(true);
        case 'stop':
          return raise('stop');
        case 'rearm':
          // Not before the arm stands: a stop is finished first.
          if (is.state !== 'stopped' || is.moving) return;
          is.blocks |= BLOCKS.held;
          return raise('rearm');
        case 'clutch':
          is.clutchKey = !is.clutchKey;
          return;
        case 'pace':
        case 'mark':
          return;
      }
    },
    board(event) {
      switch (event.kind) {
        case 'blocked':
          if (common.busy[board] === 0) common.busySinceUs[board] = event.tUs;
          common.busy[board] = 1;
          return;
        case 'free':
          common.busy[board] = 0;
          return;
        case 'ready': {
          const back = event.kept && is.pulsed && event.tUs - is.downUs <= BACK_US;
          is.present = true;
          is.pulsed = back;
          if (!back) standStill();
          // A board may start with its outputs low, and a relay that is on when low is then on by itself.
          if (!back && spec.hasPower) pending.ask('power_off');
          return raise(back ? 'back' : 'ready');
        }
        case 'down':
        case 'reboot':
          is.present = false;
          common.busy[board] = 0;
          if (event.kind === 'reboot') is.pulsed = false;
          return raise('down');
      }
    },
    jog(event) {
      if (!(event.servo in spec.servos)) return;
      if (is.state === 'holding' && !is.moving && !Number.isNaN(event.pulseUs)) raise('jog');
      if (is.state !== 'jogging') return;
      jogging.ask(event.servo, event.pulseUs);
      is.owed = true;
    },
    weigh() {
      is.blocks &= LATCHED;
      if (lead.stale) is.blocks |= BLOCKS.stale;
      if (!lead.enabled) is.blocks |= BLOCKS.enable;
      if (lead.holding) is.blocks |= BLOCKS.pedal;
      is.clutched = is.clutchKey || lead.clutched;
      if (healthSeen !== lead.healthVersion) noteHealth();
      if (leadSeen !== lead.leadVersion) {
        leadSeen = lead.leadVersion;
        raise('healed');
      }
      if (!is.present) raise('down');
      else if (!is.pulsed) raise('unpulsed');
      const ignored = is.state === 'parking' && is.parkStale ? BLOCKS.stale : 0;
      if ((is.blocks & ~ignored) !== 0) raise('block');
      else if (is.state === 'holding') raise('clear');
    },
    giveUp() {
      is.blocks |= BLOCKS.fault;
      is.present = false;
      raise('stop');
    },
  };
}
