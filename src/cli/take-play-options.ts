/** How a take is played. */
export interface PlayOptions {
  readonly rig: string;
  readonly takes: string | undefined;
  readonly by: 'leader' | 'commands';
  readonly speed: number;
  readonly from: string | undefined;
  readonly to: string | undefined;
  /** Length of the blend from end to start, microseconds; null: once. */
  readonly loopBlendUs: number | null;
  readonly countInUs: number;
  readonly map: readonly string[];
  readonly keepLimits: boolean;
  readonly weight: boolean;
  readonly unattended: boolean;
  readonly join: boolean;
  readonly stay: boolean;
  readonly json: boolean;
  /** Joints that stay in the hand, and the name of the take that is recorded; null: it is only played. */
  readonly layer: { readonly as: string; readonly joints: readonly string[] } | null;
}
