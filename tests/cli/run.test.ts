import { existsSync, readdirSync, readFileSync } from 'node:fs';
import { afterAll, describe, expect, it } from 'vitest';
import type { LiveStatus } from '../../src/bridge/live.ts';
import { demo } from '../../src/cli/demo.ts';
import { run, type RunOptions } from '../../src/cli/run.ts';
import { scratch, smallRigText } from './rigs.ts';
import { stage } from './stage.ts';

const files = scratch();
afterAll(() => files.remove());
const RIG = files.write(
  'small.yaml',
  smallRigText({ followers: [{ name: 'wren' }, { name: 'heron' }, { name: 'stork', port: 'sim:arm?name=stork' }] }),
);
const STATE = files.path('state');

const DEFAULTS: RunOptions = {
  join: false,
  pace: undefined,
  only: undefined,
  without: undefined,
  dry: false,
  for: undefined,
  json: false,
  log: 'warn',
  logFile: undefined,
};

async function ran(options: Partial<RunOptions>, file = RIG, terminal = false) {
  const on = stage({ terminal, env: { XDG_STATE_HOME: STATE } });
  const status = await on.ended(run(file, { ...DEFAULTS, ...options }, on.world));
  return { ...on, status };
}

const statusesIn = (text: string) =>
  text
    .trimEnd()
    .split('\n')
    .map((line) => JSON.parse(line) as LiveStatus & { readonly ended: string | null });

describe('run', () => {
  it('parks and leaves after its time, with status 0, and remembers where the arms are', async () => {
    const { status, out } = await ran({ join: true, json: true, for: 8_000_000 });
    expect(status).toBe(0);
    expect(statusesIn(out()).at(-1)?.ended).toBe('parked');
    const [memory = ''] = readdirSync(`${STATE}/eidograph`);
    const remembered = JSON.parse(readFileSync(`${STATE}/eidograph/${memory}`, 'utf8')) as object;
    expect(Object.keys(remembered)).toEqual(['wren', 'heron', 'stork']);
  });

  it('drives the followers that are chosen, at the pace that is said', async () => {
    const only = await ran({ join: true, json: true, for: 500_000, only: ['stork', 'wren'], pace: 0.25 });
    const [first] = statusesIn(only.out());
    expect(first?.pace).toBe(0.25);
    expect(first?.followers.map(({ follower }) => follower)).toEqual(['wren', 'stork']);
    expect(first?.boards).toHaveLength(3);
    const without = await ran({ join: true, json: true, for: 500_000, without: ['stork'] });
    expect(statusesIn(without.out())[0]?.followers.map(({ follower }) => follower)).toEqual(['wren', 'heron']);
  });

  it('needs --join where nobody sits at a terminal, with status 2 and the remedy', async () => {
    const { status, err, out } = await ran({});
    expect(status).toBe(2);
    expect(err()).toBe(
      'error: there is no terminal to ask for the go; say --join to let the arms start without asking, or --dry\n',
    );
    expect(out()).toBe('');
  });

  it('needs it with --json as well, which leaves no screen to ask on', async () => {
    expect((await ran({ json: true }, RIG, true)).status).toBe(2);
  });

  it('does not need it when it is dry, and then keeps no memory', async () => {
    const dry = files.write('dry.yaml', smallRigText());
    const before = readdirSync(`${STATE}/eidograph`).length;
    const { status, err } = await ran({ dry: true, for: 1_000_000 }, dry);
    expect(status).toBe(0);
    expect(err()).not.toContain('wren: ');
    expect(readdirSync(`${STATE}/eidograph`)).toHaveLength(before);
  });

  it('with a mistake in the rig says where, with status 2', async () => {
    const bad = files.write('bad.yaml', smallRigText().replace('rate_hz: 50', 'rat_hz: 50'));
    const { status, err } = await ran({ join: true }, bad);
    expect(status).toBe(2);
    expect(err()).toMatch(/bad\.yaml:\d+:\d+: followers\[0\]\.rat_hz: .*rate_hz/);
  });

  it('with a follower that is none says which are, with status 2', async () => {
    const { status, err } = await ran({ join: true, only: ['wern'], without: ['crocodile'] });
    expect(status).toBe(2);
    expect(err().split('\n')).toHaveLength(3);
    expect(err()).toContain('did you mean wren?');
  });

  it('writes its log to a file where that is asked for', async () => {
    const log = files.path('run.log');
    const { err } = await ran({ join: true, for: 500_000, log: 'info', logFile: log });
    expect(err()).not.toContain('"level"');
    expect(existsSync(log)).toBe(true);
    expect(readFileSync(log, 'utf8')).toContain('"msg":"stick: the board answers"');
  });
});

describe('demo', () => {
  it('has three arms following within ten seconds, with nothing asked, and ends after its time', async () => {
    const on = stage({ terminal: false });
    expect(await on.ended(demo({ for: 10_000_000, json: true, log: 'warn' }, on.world), 10_500)).toBe(0);
    const statuses = statusesIn(on.out());
    for (const name of ['wren', 'heron', 'stork']) {
      const seen = statuses.flatMap(({ followers }) => followers.filter(({ follower }) => follower === name));
      expect(seen.map(({ state }) => state)).toContain('following');
    }
    expect(statuses.at(-1)?.ended).toBe('over');
    expect(on.err()).not.toContain('Keep out of reach');
  });

  it('shows the live view and ends on q', async () => {
    const on = stage({ terminal: true });
    const running = demo({ for: undefined, json: false, log: 'warn' }, on.world);
    await on.pass(6_000);
    expect(on.screen()).toMatch(/lantern-yard[^]*wren +► following/);
    on.type('q');
    expect(await on.ended(running, 2_000)).toBe(0);
  });
});
