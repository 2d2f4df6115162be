import { describe, expect, it } from 'vitest';
import { S } from '../plans.ts';
import { Performance, rigOf, rigYaml } from './performance.ts';

const pair = rigOf(
  rigYaml([
    ['wren', 'sim:arm?seed=2'],
    ['heron', 'sim:arm?seed=2'],
  ]),
);

describe('two followers on one board', () => {
  it('both follow, and no command is computed that the port does not take', () => {
    const on = new Performance(pair, { baud: 57_600 }).run(8 * S);
    expect(on.states()).toEqual(['following', 'following']);
    expect(on.refused).toBe(0);
  });

  it('share a board that is too slow for both, turn by turn', () => {
    const on = new Performance(pair, { baud: 2_400 }).run(8 * S);
    const [wren, heron] = on.live.drive.followers.map((f) => f.commands) as [number, number];
    expect(on.refused).toBe(0);
    expect(wren).toBeGreaterThan(50);
    expect(Math.abs(wren - heron)).toBeLessThanOrEqual(0.2 * wren);
  });
});
