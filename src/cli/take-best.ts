import { best, type Demonstration } from '../take/best.ts';
import { withTakes } from './take-files.ts';
import { worked } from './take-work.ts';
import type { TakeWorld } from './take-world.ts';

/** Orders takes of one motion, the best first. */
export function bestTake(
  names: readonly string[],
  options: { readonly takes: string | undefined; readonly json: boolean },
  world: TakeWorld,
): Promise<number> {
  return withTakes(world, options.takes, names, async (takes) => {
    const ordered = await worked(best(takes), world);
    if ('status' in ordered) return ordered.status;
    world.out.write(options.json ? `${JSON.stringify({ takes: ordered.done })}\n` : table(ordered.done));
    return 0;
  });
}

function table(ordered: readonly Demonstration[]): string {
  const width = Math.max(...ordered.map(({ take }) => take.length));
  const number = (value: number | null, decimals: number): string => value?.toFixed(decimals) ?? 'none';
  return ordered
    .map(
      (one) =>
        `${one.take.padEnd(width)}  ${`${one.places}`.padStart(3)} places: arc length ${number(one.spectral_arc_length, 2)}, jerk ${number(one.log_dimensionless_jerk, 2)}, ` +
        `held back ${number(one.held_back_s, 1)} s, ${one.dropouts} dropouts, ${number(one.from_others_deg, 2)} deg from the others\n`,
    )
    .join('');
}
