import { US_PER_S } from '../clock/clock.ts';
import type { DriveStatus } from '../drive/status.ts';

/** Commands a second of each follower, over about the last second. */
export interface Rates {
  readonly perSecond: readonly number[];
  push(status: DriveStatus): void;
}

interface Counted {
  readonly tUs: number;
  readonly commands: readonly number[];
}

const OVER_US = US_PER_S;
/** More looks than fit into a second at the pace anybody looks. */
const LOOKS_MAX = 64;

export function rates(followers: number): Rates {
  const looks: Counted[] = [];
  const perSecond = Array.from({ length: followers }, () => 0);
  return {
    perSecond,
    push({ t_us, followers: now }) {
      looks.push({ tUs: t_us, commands: now.map(({ commands }) => commands) });
      while (looks.length > LOOKS_MAX || (looks[1] !== undefined && t_us - looks[1].tUs >= OVER_US)) looks.shift();
      const first = looks[0] as Counted;
      const spanS = (t_us - first.tUs) / US_PER_S;
      for (let f = 0; f < followers; f++) {
        const more = (now[f]?.commands ?? 0) - (first.commands[f] ?? 0);
        perSecond[f] = spanS > 0 ? more / spanS : 0;
      }
    },
  };
}
