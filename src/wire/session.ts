import type { WireChoice } from './choice.ts';
import { firmataSession } from './firmata.ts';
import { framesSession } from './frames.ts';
import { linesSession } from './lines.ts';
import type { BoardPlan, WireSession } from './types.ts';

/** One wire, to be spoken on one open port. Throws on a plan that the rig's checks should have refused. */
export function openSession(choice: WireChoice, plan: BoardPlan): WireSession {
  switch (choice.name) {
    case 'lines':
      return linesSession(choice.lines, plan);
    case 'frames':
      return framesSession(plan);
    case 'firmata':
      return firmataSession(plan);
  }
}
