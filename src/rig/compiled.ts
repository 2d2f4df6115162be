import type { Plan } from '../drive/plan.ts';
import type { BoardPlan } from '../wire/types.ts';
import type { WireChoice } from '../wire/choice.ts';
import type { Address } from '../port/address.ts';

/** A rig file turned into what the program runs on. */
export interface CompiledRig {
  readonly name: string;
  readonly plan: Plan;
  /** One entry a distinct port, in order of first mention; the leader's comes first. */
  readonly boards: readonly CompiledBoard[];
}

export interface CompiledBoard {
  readonly address: Address;
  readonly wire: WireChoice;
  readonly plan: BoardPlan;
  /** Whether the leader's readings come from this board. */
  readonly leads: boolean;
  /** For each of `plan.outputs`, the follower's index in the rig. */
  readonly followers: readonly number[];
}
