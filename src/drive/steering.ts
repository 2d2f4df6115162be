import { US_PER_S } from '../clock/clock.ts';
import type { Follower } from '../follower/follower.ts';
import type { Aim } from './aim.ts';
import type { Authority } from './authority.ts';
import type { Jog } from './jog.ts';
import type { LeaderStage } from './leader-stage.ts';
import type { Shared } from './shared.ts';
import type { Shares } from './shares.ts';
import type { Standing } from './standing.ts';

const MET_RAD = (1 * Math.PI) / 180;
/** A target is followed on for this many periods of the arm after its instant, and no longer. */
const AHEAD_PERIODS = 2;
const WAIT_RAD = (3 * Math.PI) / 180;

interface Parts {
  readonly share: Shares;
  readonly jogging: Jog;
  readonly aim: Aim;
  readonly rule: Authority;
}

/** What the arm does in each state: one governed step, and what its end state entails. */
export class Steering {
  readonly #is: Standing;
  readonly #index: number;
  readonly #arm: Follower;
  readonly #lead: LeaderStage;
  readonly #common: Shared;
  readonly #parts: Parts;
  readonly #standing: Float64Array;
  readonly #ahead: Float64Array;

  constructor(is: Standing, index: number, arm: Follower, lead: LeaderStage, common: Shared, parts: Parts) {
    this.#is = is;
    this.#index = index;
    this.#arm = arm;
    this.#lead = lead;
    this.#common = common;
    this.#parts = parts;
    this.#standing = new Float64Array(parts.aim.speedsRadS.length);
    this.#ahead = new Float64Array(parts.aim.speedsRadS.length);
  }

  /** Moves the arm by dtS[0] seconds as its state asks. */
  step(dtS: Float64Array): void {
    const is = this.#is;
    const arm = this.#arm;
    const { share } = this.#parts;
    switch (is.state) {
      case 'following':
        this.#wish();
        share.following(this.#index);
        arm.limitSpeed(this.#common.share, false);
        arm.step(dtS);
        break;
      case 'joining':
        this.#join(dtS);
        break;
      case 'parking':
        arm.wantRest();
        share.parking(this.#index);
        arm.limitSpeed(this.#common.share, true);
        arm.step(dtS);
        break;
      case 'jogging':
        this.#jog(dtS);
        return;
      default:
        arm.brake(dtS);
    }
    this.#settle();
  }

  /** Brakes for dtS[0] seconds, whatever its state. */
  brake(dtS: Float64Array): void {
    this.#arm.brake(dtS);
    this.#settle();
  }

  /** On its way from the last target the take goes on as fast as it then did, for as long as the next one may take. */
  #pursue(): void {
    const is = this.#is;
    const { aim } = this.#parts;
    const ahead = this.#ahead;
    if (is.state !== 'following') {
      this.#arm.pursue(aim.anglesRad, this.#standing, is.clutched);
      return;
    }
    const sinceUs = (this.#common.nowUs[0] as number) - aim.atUs;
    const aheadS = Math.min(sinceUs, AHEAD_PERIODS * this.#arm.spec.periodUs) / US_PER_S;
    for (let j = 0; j < ahead.length; j++)
      ahead[j] = (aim.anglesRad[j] as number) + aheadS * (aim.speedsRadS[j] as number);
    this.#arm.pursue(ahead, aim.speedsRadS, is.clutched);
  }

  #wish(): void {
    const is = this.#is;
    const lead = this.#lead;
    if (lead.byTargets) this.#pursue();
    else if (lead.speedRadS !== null && is.state === 'following' && !is.clutched)
      this.#arm.match(lead.poseRad, lead.speedRadS);
    else this.#arm.want(lead.poseRad, is.clutched);
  }

  #join(dtS: Float64Array): void {
    const is = this.#is;
    const arm = this.#arm;
    const { share, rule } = this.#parts;
    this.#wish();
    is.meeting ||= arm.passed(WAIT_RAD);
    if (!is.meeting) {
      arm.brake(dtS);
      return;
    }
    share.joining(this.#index);
    arm.limitSpeed(this.#common.share, true);
    arm.step(dtS);
    // A leader that never stands is met once the arm, with patience gone, is as near as its limits let it follow.
    if (arm.near(MET_RAD, share.impatient(this.#index))) rule.raise('met');
  }

  #jog(dtS: Float64Array): void {
    const { jogging, rule } = this.#parts;
    this.#arm.aim();
    const going = jogging.step(dtS, this.#arm.frame.pulsesUs);
    this.#is.moving = jogging.moving;
    if (!going) rule.raise('jogged');
  }

  /** What coming to a stand entails. */
  #settle(): void {
    const is = this.#is;
    const arm = this.#arm;
    const { rule } = this.#parts;
    is.moving = !arm.governor.still();
    if (is.moving) return;
    if (is.state === 'parking' && arm.atRest()) {
      rule.raise('rested');
      if (is.limpAfterPark) rule.raise('limp');
    } else if (is.state === 'stopped' && arm.spec.stopCategory === 1 && is.pulsed) rule.cutPower();
  }
}
