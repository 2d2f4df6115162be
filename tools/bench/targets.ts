import { commandBytes } from '../../src/wire/frames-layout.ts';
import type { Figures, Row } from './rounds.ts';
import { JOINTS } from './scene.ts';
import type { WayName } from './task.ts';

/** What the project means to reach, beside what was measured. Printed, never gated: machines differ. */
export interface Target {
  readonly what: string;
  readonly measured: number;
  readonly unit: string;
  readonly asked: string;
  readonly met: boolean;
}

const BAUD = 115_200;
/** Start bit, eight data bits, stop bit. */
const BITS_PER_BYTE = 10;

/** How long one command of this scene takes on the wire, microseconds. */
export const WIRE_US = (commandBytes(JOINTS) * BITS_PER_BYTE * 1e6) / BAUD;

export function targets(figures: Figures): readonly Target[] {
  const row = (way: WayName, followers: number): Row | undefined =>
    figures.rows.find((r) => r.way === way && r.followers === followers);
  const counts = figures.size.followers;
  const few = Math.min(...counts);
  const most = Math.max(...counts);
  const atMost = (what: string, measured: number, limit: number, unit: string): Target => ({
    what,
    measured,
    unit,
    asked: `at most ${limit}`,
    met: measured <= limit,
  });
  const atLeast = (what: string, measured: number, limit: number, unit: string): Target => ({
    what,
    measured,
    unit,
    asked: `at least ${limit}`,
    met: measured >= limit,
  });
  const over = (way: WayName, followers: number): number => row(way, followers)?.overProgram ?? Number.NaN;
  const bytes = (followers: number): number => row('whole', followers)?.bytes ?? Number.NaN;
  return [
    atMost('(a) over (b), 16 followers', 1 / over('tight', 16), 1.3, 'x'),
    atMost('(a) over (b), 64 followers', 1 / over('tight', 64), 1.3, 'x'),
    atLeast('(c) over (a), 16 followers', over('stock', 16), 8, 'x'),
    atLeast('(d) over (a), 16 followers', over('hobby', 16), 5, 'x'),
    atMost(`bytes a reading, ${most} followers`, bytes(most), 512, 'bytes'),
    atMost(`bytes more than with ${few}`, bytes(most) - bytes(few), 64, 'bytes'),
    atMost(`bytes a reading, RxJS's ES2015 build`, row('whole', most)?.bytesEs2015 ?? Number.NaN, 256, 'bytes'),
    atMost(`lag added at 1 kHz, ${most} followers, p99`, figures.paced.p99Us, 120, 'us'),
  ].filter((target) => !Number.isNaN(target.measured));
}
