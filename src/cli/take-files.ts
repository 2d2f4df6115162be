import { nearest } from '../port/nearest.ts';
import { takeFile, takeNames, takesFolder } from '../take/folder.ts';
import { isTakeFault, type TakeFault, takeFault } from '../take/fault.ts';
import { openTake, type Take } from '../take/reader.ts';
import { refusedStatus } from './take-work.ts';
import type { TakeWorld } from './take-world.ts';

/** Opens a take by its name in the takes folder; one that was cut is said to be, and opens all the same. */
export function takeOrStatus(world: TakeWorld, folder: string, name: string): Take | number {
  const place = takeFile(folder, name);
  if ('fault' in place) return refusedStatus(place.fault, world.err);
  const take = openTake(place.file);
  if (isTakeFault(take)) {
    return refusedStatus(take.code === 'TAKE_MISSING' ? missing(folder, name) : take, world.err);
  }
  if (take.lostBytes !== null) world.err.write(`${lostSentence(take)}\n`);
  return take;
}

/** Whoever looks in vain wants to know where, and what was nearly meant. */
function missing(folder: string, name: string): TakeFault {
  const near = nearest(name, takeNames(folder));
  const meant = near === null ? '' : `, but one that is called ${near}`;
  return takeFault('TAKE_MISSING', name, `there is no such take in ${folder}${meant}`);
}

/** Calls `use` with takes that are open, and closes them. */
export async function withTakes(
  world: TakeWorld,
  takes: string | undefined,
  names: readonly string[],
  use: (takes: readonly Take[], folder: string) => Promise<number>,
): Promise<number> {
  const folder = takesFolder(takes, world.env);
  const open: Take[] = [];
  try {
    for (const name of names) {
      const take = takeOrStatus(world, folder, name);
      if (typeof take === 'number') return take;
      open.push(take);
    }
    return await use(open, folder);
  } finally {
    for (const take of open) take.close();
  }
}

function lostSentence({ name, lostBytes, durationUs }: Take): string {
  const after = `after ${(durationUs / 1e6).toFixed(2)} s`;
  return lostBytes === 0
    ? `${name}: it has no end mark: recording was cut off ${after}; everything up to there is whole`
    : `${name}: it was cut off ${after}: its last ${lostBytes} bytes are no whole batch and are left out (at most the last quarter second of a recording)`;
}
