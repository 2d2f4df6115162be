import { compare, type Comparison } from '../take/compare.ts';
import { type Derived, stretchOf } from '../take/derive.ts';
import { retime, splice, trim } from '../take/edit.ts';
import { isTakeFault } from '../take/fault.ts';
import { smooth } from '../take/smooth.ts';
import { withTakes } from './take-files.ts';
import { type Outcome, refusedStatus, worked } from './take-work.ts';
import type { TakeWorld } from './take-world.ts';

interface EditOptions {
  readonly takes: string | undefined;
  /** Name of the new take. */
  readonly as: string;
}

export function trimTake(
  name: string,
  options: EditOptions & { readonly from: string | undefined; readonly to: string | undefined },
  world: TakeWorld,
): Promise<number> {
  return withTakes(world, options.takes, [name], async ([take], folder) => {
    if (take === undefined) return 2;
    const stretch = stretchOf(take, options.from, options.to);
    if (isTakeFault(stretch)) return refusedStatus(stretch, world.err);
    return told(await worked(trim(folder, options.as, take, stretch), world), world);
  });
}

export function retimeTake(
  name: string,
  options: EditOptions & { readonly speed: number },
  world: TakeWorld,
): Promise<number> {
  return withTakes(world, options.takes, [name], async ([take], folder) =>
    take === undefined ? 2 : told(await worked(retime(folder, options.as, take, options.speed), world), world),
  );
}

export function spliceTakes(
  names: readonly [string, string],
  options: EditOptions & { readonly blendUs: number },
  world: TakeWorld,
): Promise<number> {
  return withTakes(world, options.takes, names, async ([first, second], folder) =>
    first === undefined || second === undefined
      ? 2
      : told(await worked(splice(folder, options.as, first, second, options.blendUs / 1e6), world), world),
  );
}

export function smoothTake(
  name: string,
  options: EditOptions & { readonly cutoff: number },
  world: TakeWorld,
): Promise<number> {
  return withTakes(world, options.takes, [name], async ([take], folder) => {
    if (take === undefined) return 2;
    const made = await worked(smooth(folder, options.as, take, options.cutoff), world);
    if ('done' in made) {
      world.err.write('away from the raw take:\n');
      for (const { joint, rms_deg, worst_deg } of made.done.joints)
        world.err.write(`  ${joint.padEnd(20)} ${rms_deg.toFixed(3)} deg rms, ${worst_deg.toFixed(3)} deg at worst\n`);
    }
    return told(made, world);
  });
}

export function compareTakes(
  names: readonly [string, string],
  options: { readonly takes: string | undefined; readonly json: boolean; readonly timed: boolean },
  world: TakeWorld,
): Promise<number> {
  return withTakes(world, options.takes, names, async ([a, b]) => {
    if (a === undefined || b === undefined) return 2;
    const compared = await worked(compare(a, b, options.timed), world);
    if ('status' in compared) return compared.status;
    world.out.write(options.json ? `${JSON.stringify(compared.done)}\n` : comparison(compared.done, options.timed));
    return 0;
  });
}

function comparison({ a, b, joints, tips, worst_shift_s, length_ratio }: Comparison, timed: boolean): string {
  const shift = `${Math.abs(worst_shift_s).toFixed(2)} s ${worst_shift_s < 0 ? 'behind' : 'ahead'}`;
  const laid = timed ? 'at the same instants' : `laid over each other in time, ${shift} at worst`;
  return [
    `${b} beside ${a}, ${laid}; ${length_ratio.toFixed(3)} times as long`,
    ...joints.map(
      ({ joint, rms_deg, worst_deg }) =>
        `  ${joint.padEnd(20)} ${rms_deg.toFixed(2)} deg rms, ${worst_deg.toFixed(2)} deg at worst`,
    ),
    ...tips.map(
      ({ arm, rms_mm, worst_mm }) =>
        `  tip of ${arm.padEnd(13)} ${rms_mm.toFixed(1)} mm rms, ${worst_mm.toFixed(1)} mm at worst`,
    ),
    '',
  ].join('\n');
}

function told(made: Outcome<Derived>, { err }: TakeWorld): number {
  if ('status' in made) return made.status;
  err.write(`${made.done.take}: ${made.done.rows} rows\n`);
  return 0;
}
