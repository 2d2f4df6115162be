import type { DriveEvent } from '../drive/events.ts';
import type { Plan } from '../drive/plan.ts';
import { castLeader } from './cast.ts';
import { takeFault, type TakeFault } from './fault.ts';
import type { Take } from './reader.ts';
import { EVENT_CODES } from './row.ts';

export { takeSentence } from './fault.ts';
export { openTake } from './reader.ts';

/** An event of the drive with its stamp, reused. */
type Told = DriveEvent & { tUs: number };

/**
 * What moved the arms of a take, as events for another rig: its readings, in counts as that rig's leader board would have
 * given them. Where a take led, or the poses were made up afterwards, counts tell only what the hand did meanwhile: then
 * every pose is told as it was recorded, and the readings for their buttons alone.
 * @param names of that board's inputs, in its order; one that the take does not have is NaN throughout
 */
export function tellingsOf(take: Take, plan: Plan, names: readonly string[]): Iterable<Told> | TakeFault {
  const { inputs } = take.header.leader;
  const places = names.map((name) => inputs.indexOf(name));
  if (places.every((place) => place < 0))
    return takeFault('TAKE_JOINTS', take.name, `it has no input of the leader's, only ${inputs.join(', ')}`);
  const by = ledBy(take);
  if (by === 'commands')
    return takeFault(
      'TAKE_COMMANDED',
      take.name,
      'its arms were led by commands, of which no reading and no pose tells',
    );
  const cast = by === 'hand' ? [] : castLeader(take, plan, new Map());
  return 'code' in cast ? cast : { [Symbol.iterator]: () => tellings(take, places, cast) };
}

/** @param cast places of the leader's joints in the take where its poses are told; empty: readings are */
function* tellings(take: Take, places: readonly number[], cast: readonly number[]): Generator<Told> {
  const reading = { kind: 'reading' as const, tUs: 0, counts: new Float64Array(places.length) };
  const pose = { kind: 'pose' as const, tUs: 0, poseRad: new Float64Array(cast.length) };
  let isLed = cast.length === 0;
  for (const row of take.readFrom(0)) {
    const isReading = row.event === EVENT_CODES.reading;
    if (!isLed) yield { kind: 'lead', tUs: row.tUs, posed: new Uint8Array(cast.length).fill(1), targets: false };
    isLed = true;
    if (isReading) {
      reading.tUs = row.tUs;
      for (let i = 0; i < places.length; i++) reading.counts[i] = row.counts[places[i] as number] ?? Number.NaN;
      yield reading;
    }
    if (cast.length === 0 || !(isReading || row.event === EVENT_CODES.pose || row.event === EVENT_CODES.blend))
      continue;
    pose.tUs = row.tUs;
    for (let j = 0; j < cast.length; j++) pose.poseRad[j] = row.poseRad[cast[j] as number] as number;
    yield pose;
  }
}

/** Who moved the arms of a take. */
function ledBy(take: Take): 'hand' | 'poses' | 'commands' {
  let found: 'hand' | 'poses' = take.header.made.posed ? 'poses' : 'hand';
  for (const { event } of take.readFrom(0)) {
    if (event === EVENT_CODES.target) return 'commands';
    if (event === EVENT_CODES.pose || event === EVENT_CODES.blend) found = 'poses';
  }
  return found;
}
