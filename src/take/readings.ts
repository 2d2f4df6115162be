import { takeFault, type TakeFault } from './fault.ts';
import type { Take } from './reader.ts';
import { EVENT_CODES } from './row.ts';

export { takeSentence } from './fault.ts';
export { openTake } from './reader.ts';

/**
 * The readings of a take as another board would have given them, in counts.
 * @param names of that board's inputs, in its order; one that the take does not have is NaN throughout
 */
export function readingsOf(
  take: Take,
  names: readonly string[],
): Iterable<{ readonly tUs: number; readonly counts: Float64Array }> | TakeFault {
  const places = names.map((name) => take.header.leader.inputs.indexOf(name));
  if (places.every((place) => place < 0))
    return takeFault(
      'TAKE_JOINTS',
      take.name,
      `it has no input of the leader's, only ${take.header.leader.inputs.join(', ')}`,
    );
  const counts = new Float64Array(names.length);
  const readings = function* (): Generator<{ readonly tUs: number; readonly counts: Float64Array }> {
    for (const row of take.readFrom(0)) {
      if (row.event !== EVENT_CODES.reading) continue;
      for (let i = 0; i < places.length; i++) counts[i] = row.counts[places[i] as number] ?? Number.NaN;
      yield { tUs: row.tUs, counts };
    }
  };
  return { [Symbol.iterator]: readings };
}
