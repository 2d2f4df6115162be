import type { Display, Ending, Look } from './display.ts';
import type { Outlet } from './outlet.ts';

/**
 * One JSON object a line on standard output: the status, and `ended`, null until the last line says why. Lines are left
 * out while the reader is busy; the last one never. What is said in words goes to standard error.
 */
export function jsonLines(out: Outlet, err: Outlet): Display {
  const line = (look: Look, ended: Ending | null): string => `${JSON.stringify({ ...look.status, ended })}\n`;
  return {
    look: (look) => void out.offer(line(look, null)),
    changed() {},
    say: ({ text }) => err.write(`${text}\n`),
    async end(look, why) {
      out.write(line(look, why));
    },
  };
}
