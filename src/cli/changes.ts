import type { Live } from '../bridge/live.ts';
import type { DriveEvent } from '../drive/events.ts';
import type { State } from '../follower/states.ts';

/** Calls `changed` for each change of a follower's state, with the very event that made it; returns a canceller. */
export function watchStates(
  live: Pick<Live, 'drive' | 'events$'>,
  changed: (follower: number, from: State, to: State, by: DriveEvent) => void,
): () => void {
  const { followers } = live.drive;
  const before = followers.map(({ is }) => is.state);
  const subscription = live.events$.subscribe((event) => {
    for (let f = 0; f < before.length; f++) {
      const from = before[f] as State;
      const to = followers[f]?.is.state as State;
      if (from === to) continue;
      before[f] = to;
      changed(f, from, to, event);
    }
  });
  return () => subscription.unsubscribe();
}
