import { describe, expect, it } from 'vitest';
import { followerSpec, MS, planOf, S } from '../plans.ts';
import { Rehearsal } from './rehearsal.ts';

const BUSY_US = 2 * MS;

describe('ports that become busy in one instant', () => {
  it('are given nothing before they are free, though each is told of alone', () => {
    const arm = { hasPower: true, stopCategory: 0 } as const;
    const on = new Rehearsal(
      planOf([followerSpec(undefined, { name: 'wren', ...arm }), followerSpec(undefined, { name: 'stork', ...arm })]),
      { busyUs: BUSY_US },
    );
    // A stop has two commands for each arm, power off and the end of pulses; both give their first at the key, both being free.
    on.following()
      .run(2 * BUSY_US)
      .key('stop')
      .run(0.1 * S);
    for (const follower of [0, 1]) {
      const told = on.commands(follower);
      expect(told.slice(-2).map(({ kind }) => kind)).toEqual(['power_off', 'limp']);
      for (let at = 1; at < told.length; at++)
        expect((told[at]?.tUs ?? 0) - (told[at - 1]?.tUs ?? 0)).toBeGreaterThanOrEqual(BUSY_US);
    }
  });
});
