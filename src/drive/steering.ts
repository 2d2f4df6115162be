import { US_PER_S } from '../clock/clock.ts';
import type { Follower } from '../follower/follower.ts';
import type { StateEvent } from '../follower/states.ts';
import type { Jog } from './jog.ts';
import type { LeaderStage } from './leader-stage.ts';
import type { Shared } from './shared.ts';
import type { Shares } from './shares.ts';
import type { Standing } from './standing.ts';

/** What the arm does in each state: one governed step, and what its end state entails. */
export interface Steering {
  /** Moves the arm by dtS[0] seconds as its state asks. */
  step(dtS: Float64Array): void;
  /** Brakes for dtS[0] seconds, whatever its state. */
  brake(dtS: Float64Array): void;
}

const MET_RAD = (1 * Math.PI) / 180;
/** A target is followed on for this many periods of the arm after its instant, and no longer. */
const AHEAD_PERIODS = 2;
const WAIT_RAD = (3 * Math.PI) / 180;

export function steering(
  is: Standing,
  index: number,
  arm: Follower,
  lead: LeaderStage,
  common: Shared,
  parts: {
    readonly share: Shares;
    readonly jogging: Jog;
    /** What the last `target` event said. */
    readonly aim: { readonly atUs: number; readonly anglesRad: Float64Array; readonly speedsRadS: Float64Array };
    readonly raise: (event: StateEvent) => void;
    readonly cutPower: () => void;
  },
): Steering {
  const { share, jogging, raise, aim } = parts;
  const standing = new Float64Array(aim.speedsRadS.length);
  const ahead = new Float64Array(aim.speedsRadS.length);
  const now = common.nowUs;

  /** On its way from the last target the take goes on as fast as it then did, for as long as the next one may take. */
  const pursue = (): void => {
    if (is.state !== 'following') {
      arm.pursue(aim.anglesRad, standing, is.clutched);
      return;
    }
    const aheadS = Math.min((now[0] as number) - aim.atUs, AHEAD_PERIODS * arm.spec.periodUs) / US_PER_S;
    for (let j = 0; j < ahead.length; j++)
      ahead[j] = (aim.anglesRad[j] as number) + aheadS * (aim.speedsRadS[j] as number);
    arm.pursue(ahead, aim.speedsRadS, is.clutched);
  };

  const wish = (): void => {
    if (lead.byTargets) pursue();
    else if (lead.speedRadS !== null && is.state === 'following' && !is.clutched)
      arm.match(lead.poseRad, lead.speedRadS);
    else arm.want(lead.poseRad, is.clutched);
  };

  const join = (dtS: Float64Array): void => {
    wish();
    is.meeting ||= arm.passed(WAIT_RAD);
    if (!is.meeting) {
      arm.brake(dtS);
      return;
    }
    share.joining(index);
    arm.limitSpeed(common.share, true);
    arm.step(dtS);
    // A leader that never stands is met once the arm, with patience gone, is as near as its limits let it follow.
    if (arm.near(MET_RAD, share.impatient(index))) raise('met');
  };

  const settle = (): void => {
    if (is.moving) return;
    if (is.state === 'parking' && arm.atRest()) {
      raise('rested');
      if (is.limpAfterPark) raise('limp');
    } else if (is.state === 'stopped' && arm.spec.stopCategory === 1 && is.pulsed) parts.cutPower();
  };

  const brake = (dtS: Float64Array): void => {
    arm.brake(dtS);
    is.moving = !arm.governor.still();
    settle();
  };

  return {
    brake,
    step(dtS) {
      switch (is.state) {
        case 'following':
          wish();
          share.following(index);
          arm.limitSpeed(common.share, false);
          arm.step(dtS);
          break;
        case 'joining':
          join(dtS);
          break;
        case 'parking':
          arm.wantRest();
          share.parking(index);
          arm.limitSpeed(common.share, true);
          arm.step(dtS);
          break;
        case 'jogging': {
          arm.aim();
          const going = jogging.step(dtS, arm.frame.pulsesUs);
          is.moving = jogging.moving;
          if (!going) raise('jogged');
          return;
        }
        default:
          brake(dtS);
          return;
      }
      is.moving = !arm.governor.still();
      settle();
    },
  };
}
