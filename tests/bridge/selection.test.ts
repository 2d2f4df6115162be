import { describe, expect, it } from 'vitest';
import { withFollowers } from '../../src/bridge/selection.ts';
import { rigOf, rigYaml } from './performance.ts';

const rig = rigOf(
  rigYaml([
    ['wren', 'sim:arm?seed=2'],
    ['heron', 'sim:arm?seed=3'],
    ['stork', 'sim:arm?seed=3'],
  ]),
);
const names = (keep: string[]): unknown => {
  const kept = withFollowers(rig, new Set(keep));
  return kept.boards.map((board) => [
    board.address.text,
    board.followers.map((f) => kept.plan.followers[f]?.name),
    board.plan.outputs.map((output) => output.follower),
  ]);
};

describe('a rig with some of its followers', () => {
  it('keeps them in order, each on its board, and leaves out ports that then carry nothing', () => {
    expect(names(['stork', 'wren'])).toEqual([
      ['sim:hand?seed=7', [], []],
      ['sim:arm?seed=2', ['wren'], ['wren']],
      ['sim:arm?seed=3', ['stork'], ['stork']],
    ]);
    expect(names(['heron', 'stork'])).toEqual([
      ['sim:hand?seed=7', [], []],
      ['sim:arm?seed=3', ['heron', 'stork'], ['heron', 'stork']],
    ]);
  });

  it('without any still has its leader', () => {
    expect(names([])).toEqual([['sim:hand?seed=7', [], []]]);
  });

  it('with all of them is itself', () => {
    expect(withFollowers(rig, new Set(['wren', 'heron', 'stork']))).toEqual(rig);
  });
});
