import { existsSync, readdirSync, statSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { playTake } from '../../src/cli/take-play.ts';
import type { PlayOptions } from '../../src/cli/take-play-options.ts';
import type { TakeWorld } from '../../src/cli/take-world.ts';
import { filmed } from '../take/studio.ts';
import { scratch, smallRig, smallRigText, type SmallRig } from './rigs.ts';
import { stage, type Stage } from './stage.ts';

const files = scratch();
const takes = files.path('takes');
afterAll(() => files.remove());

beforeAll(async () => {
  const { performance, recorder } = filmed(takes, 'bow', smallRig());
  performance.run(5_000_000);
  recorder.mark('down');
  performance.live.key('mark');
  performance.run(2_000_000);
  await recorder.end();
});

const PLAIN: PlayOptions = {
  rig: '',
  takes,
  by: 'leader',
  speed: 1,
  from: undefined,
  to: undefined,
  loopBlendUs: null,
  countInUs: 3_000_000,
  map: [],
  keepLimits: false,
  weight: false,
  unattended: false,
  join: true,
  stay: false,
  json: false,
  layer: null,
};
/** Nobody is there: the leader with its enable button is not even plugged in. */
const ENABLE: SmallRig = {
  leaderPort: 'serial:/dev/nowhere',
  leaderKeys: 'buttons: [{ name: grip, channel: 2, pressed: above, counts: 500, does: enable }]',
};

interface Play extends Stage {
  readonly ending: Promise<number>;
  readonly told: () => string;
}

let rigs = 0;
function play(options: Partial<PlayOptions> = {}, rig: SmallRig = {}, terminal = true): Play {
  const file = files.write(`rig-${rigs++}.yaml`, smallRigText(rig));
  const on = stage({ terminal, env: { XDG_STATE_HOME: files.path('state') }, size: { columns: 80, rows: 30 } });
  const { at, said } = takeWorldOn(on);
  const ending = playTake('bow', { ...PLAIN, rig: file, ...options }, on.world, at);
  return { ...on, ending, told: () => said() + on.err() };
}

/** Where the take's own words go. */
function takeWorldOn({ clock }: Stage): { readonly at: TakeWorld; readonly said: () => string } {
  let said = '';
  const err = { write: (text: string) => (said += text) };
  return {
    at: { clock, env: {}, out: err as never, err, watched: false, onInterrupt: () => () => {} },
    said: () => said,
  };
}

const head = (on: Play): string => on.screen().split('\n')[0] ?? '';

/** Lets time pass until the head of the view says something; throws when it does not. */
async function until(on: Play, what: RegExp, limitMs = 30_000): Promise<void> {
  for (let ms = 0; ms < limitMs; ms += 50) {
    if (what.test(head(on))) return;
    await on.pass(50);
  }
  throw new Error(`no ${what} within ${limitMs} ms; it shows\n${on.screen()}\n${on.told()}`);
}

describe('a play', () => {
  it('counts in before anything plays, then plays, tells how late it was, parks and leaves with status 0', async () => {
    const on = play({ from: '2s', to: '6s' });
    await until(on, /bow in 3 s/);
    const countedUs = on.clock.nowUs();
    await until(on, /playing bow 0 s/);
    expect(Math.abs(on.clock.nowUs() - countedUs - 3_000_000)).toBeLessThan(150_000);
    await until(on, /bow is over/);
    expect(await on.ended(on.ending)).toBe(0);
    expect(on.told()).toMatch(/bow: played; \d+ events, late by 0\.00 ms at the median/);
    expect(on.told()).toContain('small: every follower is parked');
  });

  it('goes on for ever where it loops, and stands where it ended where it is to stay', async () => {
    const on = play({ from: '2s', to: '4s', loopBlendUs: 500_000 });
    await until(on, /playing bow 11 s/);
    on.type('q');
    await on.pass(200);
    on.type('p');
    expect(await on.ended(on.ending)).toBe(0);
    const stays = play({ from: '2s', to: '4s', stay: true });
    await until(stays, /bow is over/);
    await stays.pass(10_000);
    expect(stays.screen()).toMatch(/wren +► following/);
    stays.signal('SIGTERM');
    expect(await stays.ended(stays.ending)).toBe(0);
  });

  it('gives over to the hand and back with a key', async () => {
    const on = play({ from: '2s', to: '6s' });
    await until(on, /playing bow 1 s/);
    on.type('o');
    await until(on, /the hand leads, bow waits/);
    await on.pass(3_000);
    on.type('o');
    await on.pass(100);
    expect(on.screen()).toMatch(/wren has stopped following and is holding: the lead changes; it joins\s+gently/);
    expect(on.screen()).not.toContain('no fresh reading');
    await until(on, /bow in 3 s/);
    await until(on, /playing bow 1 s/);
    expect(await on.ended(on.ending)).toBe(0);
  });

  it('moves nothing while nobody holds the enable button, unless it is said to be unattended', async () => {
    const held = play({ from: '2s', to: '4s' }, ENABLE);
    await held.pass(20_000);
    expect(head(held)).toContain('easing in to bow');
    expect(held.screen()).toMatch(/wren +‖ holding/);
    held.signal('SIGTERM');
    await held.ended(held.ending);
    const alone = play({ from: '2s', to: '4s', unattended: true }, ENABLE);
    await until(alone, /playing bow/);
    expect(await alone.ended(alone.ending)).toBe(0);
  });

  it('asks for the go where there is a terminal, and for --join where there is none', async () => {
    const asked = play({ join: false });
    await asked.pass(5_000);
    expect(asked.screen()).toMatch(/wren +.* waking/);
    asked.type('g');
    await until(asked, /playing bow/);
    asked.signal('SIGTERM');
    await asked.ended(asked.ending);
    const none = play({ join: false }, {}, false);
    expect(await none.ended(none.ending)).toBe(2);
    expect(none.told()).toContain('say --join to let the arms start without asking');
  });

  it.each([
    [{ from: 'curtain' }, /it has no mark "curtain"; name one of its marks/],
    [{ from: '5s', to: 'down' }, /5 s to 5 s is no stretch of its 7 s/],
    [{ map: ['base'] }, /"base" is no pair of names; say which joint is which with --map old=new/],
    [{ map: ['bace=base'] }, /it has no joint or follower bace, only base, elbow, wren/],
    [{ weight: true }, /wren has no arm: in its file/],
  ])('refuses %j before anything moves, with status 2', async (options, sentence) => {
    const on = play(options);
    expect(await on.ended(on.ending)).toBe(2);
    expect(on.told()).toMatch(sentence);
    expect(on.isOpen()).toBe(false);
  });

  it.each([
    [true, /time is stretched [2-9]\.\d\d times: the speed of wren's base/],
    [false, /^(?!.*time is stretched)/s],
  ])('stretches the time of commands where the rig goes in unison (%s)', async (unison, sentence) => {
    const slow = [{ name: 'wren', base: 'range_deg: [-40, 40], speed_deg_s: 8, accel_deg_s2: 240' }];
    const text = smallRigText({ followers: slow }).replace('rig: small', `rig: small\nunison: ${unison}`);
    const on = play({ rig: files.write('slow.yaml', text), by: 'commands', from: '2s', to: '4s' });
    await until(on, /playing bow/);
    expect(await on.ended(on.ending)).toBe(0);
    expect(on.told()).toMatch(sentence);
  });

  it('names the joint that a rig has and the take has not', async () => {
    const file = files.write(
      'bent.yaml',
      smallRigText()
        .replaceAll('name: elbow', 'name: bend')
        .replaceAll('from: elbow', 'from: bend')
        .replaceAll('{elbow.us}', '{bend.us}'),
    );
    const on = play({ rig: file });
    expect(await on.ended(on.ending)).toBe(2);
    expect(on.told()).toMatch(
      /it has no leader joint bend, only base, elbow; say which joint is which with --map old=new/,
    );
    const mapped = play({ rig: file, map: ['elbow=bend'], from: '2s', to: '3s' });
    await until(mapped, /playing bow/);
    expect(await mapped.ended(mapped.ending)).toBe(0);
  });
});

describe('a layer', () => {
  it('is refused before anything moves where its name is taken, or a joint is none', async () => {
    const size = statSync(join(takes, 'bow.arrows')).size;
    for (const [layer, sentence] of [
      [{ as: 'bow', joints: ['base'] }, /bow: there is a take of this name; choose another name/],
      [{ as: '../out', joints: ['base'] }, /this is no name for a take/],
      [{ as: 'bow-2', joints: ['nose'] }, /the rig's leader has no joint nose, only base, elbow/],
    ] as const) {
      const on = play({ layer });
      expect(await on.ended(on.ending)).toBe(2);
      expect(on.told()).toMatch(sentence);
      expect(on.isOpen()).toBe(false);
    }
    expect(readdirSync(takes)).toEqual(['bow.arrows']);
    expect(statSync(join(takes, 'bow.arrows')).size).toBe(size);
    expect(existsSync(files.path('out.arrows'))).toBe(false);
  });

  it('that is left during its count-in leaves no take', async () => {
    const on = play({ layer: { as: 'bow-2', joints: ['base'] } });
    await until(on, /bow in 3 s/);
    on.signal('SIGTERM');
    expect(await on.ended(on.ending)).toBe(0);
    expect(readdirSync(takes)).toEqual(['bow.arrows']);
  });
});

describe('a take that cannot be played', () => {
  it.each([
    ['text', 'Dear stork', /it is no Arrow stream/],
    ['empty', '', /there is nothing in it; record it again/],
  ])('(%s) is refused with what is the matter', async (name, bytes, sentence) => {
    writeFileSync(join(takes, `${name}.arrows`), bytes);
    const on = stage({ terminal: true });
    const { at, said } = takeWorldOn(on);
    const rig = files.write('plain.yaml', smallRigText());
    expect(await on.ended(playTake(name, { ...PLAIN, rig }, on.world, at))).toBe(2);
    expect(said()).toMatch(sentence);
    expect(on.isOpen()).toBe(false);
  });
});
