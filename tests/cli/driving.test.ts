import { describe, expect, it } from 'vitest';
import type { LiveStatus } from '../../src/bridge/live.ts';
import { simulatedFor } from '../../src/bridge/simulated.ts';
import { driving, type DrivingOptions } from '../../src/cli/driving.ts';
import type { CompiledRig } from '../../src/rig/compiled.ts';
import type { SimulatedBoard } from '../../src/sim/board.ts';
import { smallRig, type SmallFollower } from './rigs.ts';
import { stage, type Stage } from './stage.ts';

const PAIR: readonly SmallFollower[] = [{ name: 'wren' }, { name: 'stork' }];
/**
 * An arm that has 40 degrees to go from the start and picks up speed slowly: let go after about 0.5 s, it runs at some
 * 16 deg/s 2 s later, and needs another 2 s to stand.
 */
const HEAVY = smallRig({
  followers: [
    {
      name: 'wren',
      keys: 'wake: ask, join: { speed: 1, meet: move }',
      base: 'offset_deg: 40, range_deg: [-40, 40], speed_deg_s: 20, accel_deg_s2: 8',
    },
  ],
});
const UNTIL_FAST_MS = 2_500;
/** A servo gets a new pulse when its board next sends one: every 20 ms. */
const REFRESH_MS = 20;

interface Driven extends Stage {
  readonly run: Promise<number>;
  /** By the name of the leader or of the follower. */
  readonly boards: ReadonlyMap<string, SimulatedBoard>;
}

function drive(
  changes: Partial<DrivingOptions> = {},
  where: { terminal: boolean } = { terminal: true },
  rig: CompiledRig = smallRig({ followers: PAIR }),
): Driven {
  const on = stage(where);
  const boards = new Map<string, SimulatedBoard>();
  const run = driving(
    {
      rig,
      openPort(board) {
        const made = simulatedFor(rig, board, on.clock);
        const first = board.followers[0];
        const name = board.leads ? rig.plan.leader.name : rig.plan.followers[first ?? 0]?.name;
        boards.set(name ?? '', made);
        return made.port;
      },
      memory: () => null,
      unasked: false,
      dry: false,
      real: true,
      forUs: null,
      json: false,
      logLevel: 'warn',
      logFile: null,
      ...changes,
    },
    on.world,
  );
  return { ...on, run, boards };
}

const statusesIn = (text: string) =>
  text
    .trimEnd()
    .split('\n')
    .map((line) => JSON.parse(line) as LiveStatus & { readonly ended: string | null });

/** A pulse comes to a servo: it is no longer as it was found. */
const isPulsed = (board: SimulatedBoard | undefined): boolean =>
  !Number.isNaN(board?.arms[0]?.pulseUs(0) ?? Number.NaN);

describe('A run at a terminal', () => {
  it('shows the wake pose and the cautions, and sends nothing until the go', async () => {
    const at = drive();
    await at.pass(5_000);
    expect(at.screen()).toMatch(/wren +◐ waking/);
    expect(at.screen()).toContain('wakes at its rest pose; see that it stands so, then let it go');
    expect(at.screen()).toContain('Keep out of reach');
    expect(isPulsed(at.boards.get('wren'))).toBe(false);
    at.type('g');
    await at.pass(1_000);
    expect(isPulsed(at.boards.get('wren'))).toBe(true);
    expect(at.screen()).not.toContain('Keep out of reach');
    await at.pass(8_000);
    expect(at.screen()).toMatch(/wren +► following.*\n[^]*stork +► following/);
    at.signal('SIGTERM');
    await at.ended(at.run);
  });

  it('lets one follower go and not the other', async () => {
    const at = drive();
    await at.pass(3_000);
    at.type('2g');
    await at.pass(1_000);
    expect(isPulsed(at.boards.get('stork'))).toBe(true);
    expect(isPulsed(at.boards.get('wren'))).toBe(false);
    at.signal('SIGTERM');
    await at.ended(at.run);
  });

  it('on Ctrl-C brakes, holds and offers to park; parks on p; leaves on the second, with status 130', async () => {
    const at = drive({ unasked: true });
    await at.pass(10_000);
    expect(at.screen()).toMatch(/wren +► following/);
    at.type('\x03');
    expect(at.screen()).toContain('p: park');
    await at.pass(1_000);
    expect(at.screen()).toMatch(/wren +‖ holding/);
    at.type('p');
    await at.pass(500);
    expect(at.screen()).toMatch(/wren +(↓ parking|‖ holding)/);
    await at.pass(5_000);
    expect(at.screen()).toMatch(/wren +‖ holding[^]*base .*\+0\.0°/);
    at.type('\x03');
    await at.pass(200);
    expect(at.isOpen()).toBe(true);
    at.type('\x03');
    expect(await at.ended(at.run, 2_000)).toBe(130);
    expect(at.isOpen()).toBe(false);
    expect(at.err()).toContain('small: interrupted; every follower has braked\n');
  });

  it('brakes inside its limits before it leaves, however the leader moves', async () => {
    const at = drive({ unasked: true });
    await at.pass(9_000);
    at.type('\x03\x03');
    await at.ended(at.run, 2_000);
    const wren = at.boards.get('wren')?.arms[0];
    await at.pass(REFRESH_MS);
    const before = wren?.pulseUs(0);
    await at.pass(2_000);
    expect(wren?.pulseUs(0)).toBe(before);
    expect(at.err()).toMatch(/wren, stork: left where the last command put it; most boards go on holding/);
  });

  it('leaves at once on q while no arm is awake, and asks when one is', async () => {
    const asleep = drive();
    await asleep.pass(1_000);
    asleep.type('q');
    expect(await asleep.ended(asleep.run, 500)).toBe(0);

    const awake = drive({ unasked: true });
    await awake.pass(3_000);
    awake.type('q');
    await awake.pass(2_000);
    expect(awake.screen()).toContain('All held. Leave?');
    awake.type('p');
    expect(await awake.ended(awake.run)).toBe(0);
    expect(awake.err()).toContain('every follower is parked');
  });

  it('stays where an arm cannot be parked before leaving, and says which', async () => {
    const at = drive({ unasked: true });
    await at.pass(9_000);
    at.type(' ');
    await at.pass(1_000);
    at.type('qp');
    await at.pass(1_000);
    expect(at.isOpen()).toBe(true);
    expect(at.screen()).toContain('not parked: wren (stopped), stork (stopped); look to the arm');
    expect(at.screen()).not.toContain('Parking, then leaving');
    at.type('qq');
    expect(await at.ended(at.run, 2_000)).toBe(0);
  });

  it('stops all on the space bar, and goes on after rearm and join only', async () => {
    const at = drive({ unasked: true });
    await at.pass(9_000);
    at.type(' ');
    await at.pass(1_000);
    expect(at.screen()).toMatch(/wren +■ stopped/);
    at.type('j');
    await at.pass(500);
    expect(at.screen()).toMatch(/wren +■ stopped/);
    at.type('r');
    await at.pass(500);
    expect(at.screen()).toMatch(/wren +‖ holding/);
    at.type('j');
    await at.pass(500);
    expect(at.screen()).toMatch(/wren +(» joining|► following)/);
    at.signal('SIGTERM');
    await at.ended(at.run);
  });

  it('sets the pace and shows it', async () => {
    const at = drive({ unasked: true });
    await at.pass(500);
    at.type('--');
    await at.pass(100);
    expect(at.screen()).toContain('pace 25 %');
    at.type('+');
    await at.pass(100);
    expect(at.screen()).toContain('pace 50 %');
    at.signal('SIGTERM');
    await at.ended(at.run);
  });

  it('rings once when followers stop following together, and says which and why', async () => {
    const at = drive({ unasked: true });
    await at.pass(9_000);
    const before = at.bells();
    at.boards.get('stick')?.far.unplug();
    await at.pass(1_000);
    expect(at.bells()).toBe(before + 1);
    expect(at.screen()).toMatch(/wren has stopped following and is holding: no fresh reading of the leader; look to/);
    expect(at.screen()).toContain('stick: sim:hand?seed=7 was unplugged; plug it in again');
    at.signal('SIGTERM');
    await at.ended(at.run);
  });

  it('goes on when one port is lost, and keeps telling what is wrong with it', async () => {
    const at = drive({ unasked: true });
    await at.pass(9_000);
    at.boards.get('stork')?.far.unplug('PORT_BUSY');
    await at.pass(3_000);
    expect(at.screen()).toMatch(/wren +► following/);
    expect(at.screen()).toMatch(/stork ○ absent/);
    expect(at.screen()).toContain('is held by another program; close it and the bridge reconnects');
    at.signal('SIGTERM');
    await at.ended(at.run);
  });

  it('draws anew when the terminal changes its size', async () => {
    const at = drive();
    await at.pass(1_000);
    at.resize({ columns: 40, rows: 10 });
    const lines = at.screen().split('\n');
    expect(lines).toHaveLength(10);
    expect(Math.max(...lines.map((line) => line.length))).toBeLessThanOrEqual(40);
    at.signal('SIGTERM');
    await at.ended(at.run);
  });

  it('keeps the log off the screen it has taken, and tells a fault of its own after giving it back', async () => {
    const at = drive({ unasked: true });
    await at.pass(500);
    at.bug(new Error('planted'));
    expect(await at.ended(at.run, 2_000)).toBe(1);
    expect(at.err()).not.toContain('"level"');
    expect(at.err()).toMatch(/a fault of this program: Error: planted\n +at /);
    expect(at.err()).toContain('ended by a fault of this program');
  });
});

describe.each([
  ['SIGTERM', (at: Driven) => at.signal('SIGTERM')],
  ['SIGHUP', (at: Driven) => at.signal('SIGHUP')],
  ['the end of the terminal', (at: Driven) => at.hangUp()],
  ['the end of whoever reads', (at: Driven) => at.closeOut('EPIPE')],
])('On %s', (_, happens) => {
  it('a run brakes, holds and leaves with status 0', async () => {
    const at = drive({ unasked: true });
    await at.pass(9_000);
    happens(at);
    expect(await at.ended(at.run, 1_500)).toBe(0);
    const wren = at.boards.get('wren')?.arms[0];
    await at.pass(REFRESH_MS);
    const before = wren?.pulseUs(0);
    await at.pass(1_000);
    expect(wren?.pulseUs(0)).toBe(before);
    expect(before).not.toBeNaN();
  });
});

describe('A run with an arm that cannot come to a stand', () => {
  it('leaves after a second, and at once when asked again', async () => {
    const leave = async (twice: boolean): Promise<number> => {
      const at = drive({ unasked: true }, { terminal: false }, HEAVY);
      await at.pass(UNTIL_FAST_MS);
      const before = at.clock.nowUs();
      at.signal('SIGTERM');
      await at.pass(100);
      if (twice) at.signal('SIGTERM');
      expect(await at.ended(at.run, 3_000)).toBe(1);
      expect(at.err()).toContain('wren: left before it stood still; look to the arm');
      return at.clock.nowUs() - before;
    };
    expect(await leave(false)).toBeGreaterThan(950_000);
    expect(await leave(true)).toBeLessThan(300_000);
  });
});

describe('A run for a time', () => {
  it('then parks every follower and leaves with status 0', async () => {
    const at = drive({ unasked: true, forUs: 8_000_000, json: true }, { terminal: false });
    expect(await at.ended(at.run)).toBe(0);
    const last = statusesIn(at.out()).at(-1);
    expect(last?.ended).toBe('parked');
    for (const { state, joints } of last?.followers ?? []) {
      expect(state).toBe('holding');
      for (const { angle_deg } of joints) expect(angle_deg).toBeCloseTo(0, 9);
    }
    expect((last?.t_us ?? 0) - 1_000_000).toBeGreaterThan(8_000_000);
  });

  it('leaves with status 1 and names the arm that could not be parked', async () => {
    const at = drive({ unasked: true, forUs: 8_000_000 }, { terminal: false });
    await at.pass(7_000);
    at.boards.get('stork')?.far.unplug();
    expect(await at.ended(at.run, 20_000)).toBe(1);
    expect(at.err()).toContain('not parked: stork (absent); look to the arm');
    expect(at.out()).toContain('ended: unparked');
  });

  it('names it again when a terminal has been given back', async () => {
    const at = drive({ unasked: true, forUs: 6_000_000 });
    await at.pass(5_000);
    at.boards.get('stork')?.far.unplug();
    expect(await at.ended(at.run, 20_000)).toBe(1);
    expect(at.isOpen()).toBe(false);
    expect(at.err()).toContain(
      'not parked: stork (absent); look to the arm before its power goes\nsmall: ended with a follower',
    );
  });

  it('does not wait for ever for an arm whose port takes nothing', async () => {
    const at = drive({ unasked: true, forUs: UNTIL_FAST_MS * 1_000 }, { terminal: false }, HEAVY);
    await at.pass(UNTIL_FAST_MS + 100);
    expect(at.out()).toContain('wren: joining -> parking');
    at.boards.get('wren')?.far.block();
    expect(await at.ended(at.run, 8_000)).toBe(1);
    expect(at.err()).toContain('not parked: wren (absent)');
  });

  it('is not ended by arms that the operator never let go', async () => {
    const at = drive({ forUs: 2_000_000 });
    expect(await at.ended(at.run, 5_000)).toBe(0);
    expect(isPulsed(at.boards.get('wren'))).toBe(false);
  });

  it('with simulated arms ends there', async () => {
    const at = drive({ unasked: true, real: false, forUs: 3_000_000, json: true }, { terminal: false });
    expect(await at.ended(at.run, 3_500)).toBe(0);
    const last = statusesIn(at.out()).at(-1);
    expect(last?.ended).toBe('over');
    expect(last?.followers.map(({ state }) => state)).toContain('following');
  });
});

describe('A run without a terminal', () => {
  it('prints each change of state with its reason, and how all stands every five seconds', async () => {
    const at = drive({ unasked: true }, { terminal: false });
    await at.pass(11_000);
    at.boards.get('stick')?.far.unplug();
    await at.pass(1_000);
    at.signal('SIGTERM');
    await at.ended(at.run);
    const lines = at.out().trimEnd().split('\n');
    expect(lines.filter((line) => line.includes('pace 100 % |'))).toHaveLength(4);
    expect(lines).toContainEqual(expect.stringMatching(/^ +0\.\d s {2}wren: absent -> waking: its servos get/));
    expect(lines).toContainEqual(expect.stringMatching(/wren: joining -> following$/));
    expect(lines).toContainEqual(expect.stringMatching(/wren: following -> holding: no fresh reading of the leader; /));
    expect(lines.at(-1)).toMatch(/ended: terminated$/);
    expect(at.err()).toContain('stick: sim:hand?seed=7 was unplugged; plug it in again and the bridge reconnects\n');
  });

  it('says the cautions first, on standard error', async () => {
    const at = drive({ unasked: true }, { terminal: false });
    await at.pass(10);
    expect(at.err()).toMatch(/^Keep out of reach: [^]*ISO 13850/);
    at.signal('SIGTERM');
    await at.ended(at.run);
  });

  it('holds on a first SIGINT, says so, and leaves on the second with status 130', async () => {
    const at = drive({ unasked: true }, { terminal: false });
    await at.pass(9_000);
    at.signal('SIGINT');
    await at.pass(1_000);
    expect(at.out()).toMatch(/wren: following -> holding: held/);
    expect(at.err()).toContain('every follower brakes and holds; interrupt once more to leave\n');
    at.signal('SIGINT');
    expect(await at.ended(at.run, 1_500)).toBe(130);
  });

  it('that moves nothing leaves on the first, with status 130', async () => {
    for (const harmless of [{ real: false }, { dry: true }]) {
      const at = drive({ unasked: true, ...harmless }, { terminal: false });
      await at.pass(2_000);
      at.signal('SIGINT');
      expect(await at.ended(at.run, 1_500)).toBe(130);
    }
  });

  it('as JSON prints ten lines a second, each a whole status, and why it ended on the last', async () => {
    const at = drive({ unasked: true, json: true }, { terminal: false });
    await at.pass(2_000);
    at.signal('SIGTERM');
    await at.ended(at.run);
    const statuses = statusesIn(at.out());
    expect(statuses.filter(({ t_us }) => t_us - 1_000_000 < 2_000_000)).toHaveLength(20);
    expect(statuses.slice(0, -1).every(({ ended }) => ended === null)).toBe(true);
    expect(statuses.at(-1)?.ended).toBe('terminated');
    expect(Object.keys(statuses[0] ?? {})).toEqual([
      't_us',
      'pace',
      'unison',
      'leader',
      'followers',
      'boards',
      'ended',
    ]);
  });

  it('fails with status 1 when its output cannot be kept', async () => {
    const at = drive({ unasked: true }, { terminal: false });
    await at.pass(1_000);
    at.closeOut('ENOSPC');
    expect(await at.ended(at.run, 1_500)).toBe(1);
  });
});

describe('A dry run', () => {
  it('opens the leader only, and shows what the followers would do', async () => {
    const at = drive({ dry: true });
    await at.pass(6_000);
    expect([...at.boards.keys()]).toEqual(['stick']);
    expect(at.screen()).toContain('dry: nothing is sent');
    expect(at.screen()).toMatch(/wren +► following/);
    at.type('q');
    expect(await at.ended(at.run, 1_500)).toBe(0);
    expect(at.err()).not.toContain('Keep out of reach');
  });
});

describe('The memory of poses', () => {
  it('is where a follower wakes, and is shown as such', async () => {
    const recalled = Float64Array.of(0.5, -0.25);
    const at = drive({
      memory: () => ({ recall: ({ name }) => (name === 'wren' ? recalled : null), watch: () => ({ stop() {} }) }),
    });
    await at.pass(2_000);
    expect(at.screen()).toMatch(/wren[^]*wakes where it was last told to be[^]*stork[^]*wakes at its rest pose/);
    // 0.5 rad is 28.6 degrees.
    expect(at.screen()).toMatch(/wren[^]*base .*\+28\.6°[^]*stork/);
    at.type('q');
    await at.ended(at.run);
  });

  it('that cannot be kept is told, and the run goes on', async () => {
    let fail: (detail: string) => void = () => {};
    const at = drive({
      memory: (onFault) => {
        fail = onFault;
        return null;
      },
    });
    await at.pass(500);
    fail('EROFS: read-only file system');
    await at.pass(100);
    expect(at.screen()).toContain('the wake pose cannot be kept: EROFS: read-only file system');
    at.type('q');
    expect(await at.ended(at.run)).toBe(0);
  });
});
