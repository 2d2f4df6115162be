import { describe, expect, it } from 'vitest';
import { chunks, countAt, type CountAt, PERIOD_US, scene, START_US } from '../../tools/bench/scene.ts';
import { hobby } from '../../tools/bench/hobby.ts';
import { stock } from '../../tools/bench/stock.ts';
import { tight } from '../../tools/bench/tight.ts';
import type { Way } from '../../tools/bench/way.ts';
import { whole } from '../../tools/bench/whole.ts';

const FOLLOWERS = 5;
const SECOND = 1_000_000 / PERIOD_US;

/** Pushes every reading through all ways; tells the first after which one way's commands differ from the first one's. */
function firstDifference(ways: readonly Way[], readings: number, atUs: (k: number) => number, count: CountAt): string {
  const nowUs = new Float64Array(1);
  const bytes = chunks('frames', readings, count);
  for (let k = 0; k < readings; k++) {
    nowUs[0] = atUs(k);
    for (const way of ways) way.push(bytes[k] as Uint8Array, nowUs);
    const [first, ...others] = ways.map(everything);
    for (const other of others) if (other !== first) return `reading ${k}: ${first}; ${other}`;
  }
  return 'none';
}

function everything(way: Way): string {
  const sent = Array.from({ length: FOLLOWERS }, (_, f) => Buffer.from(way.sent(f)).toString('hex'));
  return `${way.commands()} commands, ${sent.join(' ')}`;
}

const steady = (k: number): number => START_US + (k + 1) * PERIOD_US;

describe('the ways of the bench', () => {
  it('send the same bytes reading by reading: the program, the tight loop and stock operators', () => {
    const one = scene(FOLLOWERS, 'frames');
    const program = whole(one);
    const ways = [program, tight(one), stock(one)];
    expect(firstDifference(ways, 4 * SECOND, steady, countAt)).toBe('none');
    expect(program.commands()).toBe(4 * SECOND * FOLLOWERS);
    expect(program.drive.followers.every((follower) => follower.is.state === 'following')).toBe(true);
  });

  it('send the same bytes when a converter spikes, a pot breaks and heals, and readings stop for a while', () => {
    const one = scene(FOLLOWERS, 'frames');
    const program = whole(one);
    const spikes: CountAt = (k, j) => {
      if (k % 97 === 5 * j) return 3_500;
      if (j === 2 && k > 1.5 * SECOND && k < 2 * SECOND) return 4_095;
      return countAt(k, j);
    };
    const silence = (k: number): number =>
      steady(k) + (k >= 4 * SECOND ? 400_000 : 0) + (k >= 4.5 * SECOND ? 900_000 : 0);
    const states = new Set<string>();
    const watched: Way = {
      ...program,
      push(chunk, nowUs) {
        program.push(chunk, nowUs);
        for (const follower of program.drive.followers) states.add(follower.is.state);
      },
    };
    expect(firstDifference([watched, tight(one)], 7 * SECOND, silence, spikes)).toBe('none');
    expect(states).toContain('following');
    expect(program.drive.leader.healthVersion).toBeGreaterThanOrEqual(3);
  });

  it('say the same kind of text: the program over lines and the script, degrees of eight joints', () => {
    const one = scene(FOLLOWERS, 'lines');
    const nowUs = new Float64Array([START_US]);
    for (const way of [whole(one), hobby(one)]) {
      for (const chunk of chunks('lines', 3)) {
        nowUs[0] = (nowUs[0] as number) + PERIOD_US;
        way.push(chunk, nowUs);
      }
      // The program leaves the first line out: it may have lost its beginning.
      expect(way.commands()).toBeGreaterThanOrEqual(2 * FOLLOWERS);
      for (let f = 0; f < FOLLOWERS; f++)
        expect(Buffer.from(way.sent(f)).toString()).toMatch(/^S(-?\d+\.\d,){7}-?\d+\.\d\n$/);
    }
  });
});
