import { describe, expect, it } from 'vitest';
import { messages } from '../../src/cli/messages.ts';
import { rates } from '../../src/cli/rates.ts';
import { warm } from '../../src/cli/warm.ts';
import { smallRig } from './rigs.ts';
import { followerStatus, liveStatus } from './view/scenes.ts';

describe('Commands a second', () => {
  const at = (tUs: number, commands: number) => liveStatus({ t_us: tUs, followers: [followerStatus({ commands })] });

  it('are those of about the last second', () => {
    const rate = rates(1);
    for (let look = 0; look <= 30; look++) rate.push(at(look * 100_000, look * 5));
    // Five commands in each tenth of a second.
    expect(rate.perSecond[0]).toBeCloseTo(50, 9);
    for (let look = 31; look <= 41; look++) rate.push(at(look * 100_000, 150));
    expect(rate.perSecond[0]).toBe(0);
  });

  it('are none before there is any time to count over', () => {
    const rate = rates(1);
    rate.push(at(0, 7));
    expect(rate.perSecond).toEqual([0]);
  });
});

describe('Messages', () => {
  it('said again at once are counted rather than repeated', () => {
    const heard = messages();
    heard.add({ text: 'a', weight: 'note' }, 1);
    heard.add({ text: 'a', weight: 'note' }, 2);
    heard.add({ text: 'b', weight: 'care' }, 3);
    heard.add({ text: 'a', weight: 'note' }, 4);
    expect(heard.list).toEqual([
      { text: 'a', weight: 'note', atUs: 2, times: 2 },
      { text: 'b', weight: 'care', atUs: 3, times: 1 },
      { text: 'a', weight: 'note', atUs: 4, times: 1 },
    ]);
  });

  it('are kept up to fifty', () => {
    const heard = messages();
    for (let i = 0; i < 80; i++) heard.add({ text: `${i}`, weight: 'note' }, i);
    expect(heard.list.map(({ text }) => text)).toEqual(Array.from({ length: 50 }, (_, i) => `${i + 30}`));
  });
});

describe('Warming', () => {
  it('moves every follower of a rig, whatever its buttons', () => {
    const buttons = [
      '{ name: pedal, channel: 6, pressed: above, counts: 500, does: enable }',
      '{ name: halt, channel: 7, pressed: below, counts: 500, does: stop }',
    ];
    const followers = [{ name: 'wren' }, { name: 'stork' }];
    // 600 readings in 3 s, and 50 commands a second for each of two followers.
    expect(warm(smallRig({ followers, leaderKeys: `buttons: [${buttons.join(', ')}]` }))).toBeGreaterThan(250);
  });
});
