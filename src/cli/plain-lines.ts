import { US_PER_S } from '../clock/clock.ts';
import type { Display, Look } from './display.ts';
import type { Outlet } from './outlet.ts';
import { contact, milliseconds, percent, seconds } from './view/figures.ts';
import { damage } from './view/leader-block.ts';

/** A line of how everything stands comes this often. */
const EVERY_US = 5 * US_PER_S;

/** Plain lines where there is no terminal: states on standard output, everything said in words on standard error. */
export function plainLines(out: Outlet, err: Outlet): Display {
  let nextUs = 0;
  return {
    look(look) {
      if (look.atUs < nextUs) return;
      nextUs = look.atUs + EVERY_US;
      out.offer(`${standingLine(look)}\n`);
    },
    changed({ atUs, follower, from, to, reasons }) {
      const why = reasons.length === 0 ? '' : `: ${reasons.join('; ')}`;
      out.write(`${stamp(atUs)}  ${follower}: ${from} -> ${to}${why}\n`);
    },
    say: ({ text }) => err.write(`${text}\n`),
    async end(look, why) {
      out.write(`${standingLine(look)}\n${stamp(look.atUs)}  ended: ${why}\n`);
    },
  };
}

function standingLine({ atUs, status, perSecond, along }: Look): string {
  const followers = status.followers.map(({ follower, state, lag_us }, f) => {
    const port = status.boards.find((board) => board.followers.includes(follower)) ?? null;
    const lag = lag_us === null ? '' : `, lag ${milliseconds(lag_us)}`;
    const lost = damage(port);
    return `${follower} ${state} ${(perSecond[f] ?? 0).toFixed(0)}/s${lag}${lost === '' ? '' : `, ${lost}`}`;
  });
  const does = along === '' ? [] : [along];
  const parts = [`pace ${percent(status.pace)}`, contact(status.leader.reading_age_us), ...does, ...followers];
  return `${stamp(atUs)}  ${parts.join(' | ')}`;
}

function stamp(atUs: number): string {
  return seconds(atUs).padStart(9);
}
