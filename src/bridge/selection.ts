import type { CompiledBoard, CompiledRig } from '../rig/compiled.ts';

/** The rig with only the followers named in `keep`, in rig order; ports that then carry nothing are left out. */
export function withFollowers(rig: CompiledRig, keep: ReadonlySet<string>): CompiledRig {
  const kept = rig.plan.followers.filter((f) => keep.has(f.name));
  const boards = rig.boards
    .map((board): CompiledBoard => {
      const outputs = board.followers.flatMap((f, output) => {
        const index = kept.indexOf(rig.plan.followers[f] as (typeof kept)[number]);
        return index < 0 ? [] : [{ index, wiring: board.plan.outputs[output] as (typeof board.plan.outputs)[number] }];
      });
      return {
        ...board,
        followers: outputs.map((o) => o.index),
        plan: { ...board.plan, outputs: outputs.map((o) => o.wiring) },
      };
    })
    .filter((board) => board.leads || board.followers.length > 0);
  return { ...rig, plan: { ...rig.plan, followers: kept }, boards };
}
