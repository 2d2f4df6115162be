import type { FollowerProfile } from '../rig/schema/follower.ts';
import { fixed, percent } from './figures.ts';
import type { CheckedFollower } from './checked.ts';

/** What of a follower is over its limit, one sentence each. What the governor keeps within its limit is not. */
export function overLimits(profile: FollowerProfile, checked: CheckedFollower): readonly string[] {
  const { follower, joints, supply_a, ...all } = checked;
  const said: string[] = [];
  const say = (is: boolean, sentence: string): void => {
    if (is) said.push(`${follower}: ${sentence}`);
  };
  for (const { joint, load_share, load_worst_nm, moving_share, moving_worst_nm } of joints) {
    say(
      profile.load === 'warn' && (load_share ?? 0) > 1,
      `${joint} has to hold ${fixed(load_worst_nm, 2)} Nm, ${percent(load_share)} of what its motor may hold; balance it, or narrow its range`,
    );
    say(
      profile.moving_load === 'warn' && (moving_share ?? 0) > 1,
      `${joint} takes up to ${fixed(moving_worst_nm, 2)} Nm to move, ${percent(moving_share)} of what its motor may use; lower accel_deg_s2, or balance it`,
    );
  }
  say(
    (all.tipping_static_nm ?? 0) < 0,
    `it tips over by its own weight, by ${fixed(negated(all.tipping_static_nm), 2)} Nm; widen or weight its base`,
  );
  say(
    (all.tipping_static_nm ?? 0) >= 0 && (all.tipping_margin_nm ?? 0) < 0,
    `it can tip over as it accelerates, by ${fixed(negated(all.tipping_margin_nm), 2)} Nm; weight its base, or lower accel_deg_s2`,
  );
  say(
    (all.sliding_margin_n ?? 0) < 0,
    `its base can slide, by ${fixed(negated(all.sliding_margin_n), 1)} N; weight it, or lower accel_deg_s2`,
  );
  if (supply_a === null) return said;
  for (const [amps, when] of [
    [all.supply_one_by_one_a, 'as its servos start one by one'],
    [all.supply_moving_a, 'as all its joints move'],
  ] as const) {
    say(
      (amps ?? 0) > supply_a,
      `it draws up to ${fixed(amps, 1)} A ${when}, and its supply gives ${fixed(supply_a, 1)} A`,
    );
  }
  return said;
}

function negated(value: number | null): number | null {
  return value === null ? null : -value;
}
