import type { FollowerSpec } from '../follower/spec.ts';
import type { CompiledRig } from '../rig/compiled.ts';

/**
 * A rig as it is driven while it is being measured: followers copy nothing, wake with every servo that turns one joint
 * alone at the middle of its points, and know no geometry, because none of their maps is to be trusted yet.
 */
export function rigToMeasure(rig: CompiledRig): CompiledRig {
  const { plan } = rig;
  return { ...rig, plan: { ...plan, unison: false, pace: 1, followers: plan.followers.map(standingInTheMiddle) } };
}

type Draft = { -readonly [K in keyof FollowerSpec]: FollowerSpec[K] };

function standingInTheMiddle(spec: FollowerSpec): FollowerSpec {
  const measured: Draft = {
    ...spec,
    wake: 'ask',
    joints: spec.joints.map((joint, j) => {
      const own = spec.servos.find(({ turns }) => turns.length === 1 && turns[0]?.joint === j);
      const restRad = own === undefined ? joint.restRad : middleOf(own) / (own.turns[0]?.weight ?? 1);
      return {
        ...joint,
        sources: [],
        restRad,
        minRad: Math.min(joint.minRad, restRad),
        maxRad: Math.max(joint.maxRad, restRad),
      };
    }),
  };
  delete measured.whole;
  return measured;
}

function middleOf({ map }: FollowerSpec['servos'][number]): number {
  return map.inverse((map.yMin + map.yMax) / 2);
}
