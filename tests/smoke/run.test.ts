import { type ChildProcess, spawn } from 'node:child_process';
import { once } from 'node:events';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import type { LiveStatus } from '../../src/bridge/live.ts';
import { scratch, smallRigText } from '../cli/rigs.ts';
import { noPty, pluggedPty, type Pty } from '../port/pty.ts';

/**
 * The program as it is started, over pseudo-terminals and the real serialport binding, in real time. Everything is
 * polled until it has settled: how long that takes is this machine's matter, not the program's.
 */
const LIMIT_MS = 90_000;
const READING_MS = 10;

/**
 * base: 700 counts are 40 degrees; 0.5 * 40 + 5 = 25 degrees, 1500 + 250 us.
 * elbow: 400 counts are -20 degrees; reversed: 20 degrees, 1500 + 200 us.
 */
const READING = '700,400\r\n';
const FOLLOWED = '1750,1700';
/** Both joints rest at 0 degrees. */
const RESTED = '1500,1500';
const WREN = {
  name: 'wren',
  base: 'gain: 0.5, offset_deg: 5, range_deg: [-20, 30], speed_deg_s: 60, accel_deg_s2: 240',
  elbow: 'direction: reversed, range_deg: [-40, 40], speed_deg_s: 60, accel_deg_s2: 240',
};

interface Program {
  readonly child: ChildProcess;
  readonly ended: Promise<number | null>;
  status(): (LiveStatus & { readonly ended: string | null }) | null;
  said(): string;
}

let files: ReturnType<typeof scratch>;
let leader: Pty;
let follower: Pty;
let talking: NodeJS.Timeout;
let program: Program | null;

beforeEach(async () => {
  if (noPty !== null) throw new Error(`the smoke test needs pseudo-terminals: ${noPty}`);
  files = scratch();
  leader = await pluggedPty();
  follower = await pluggedPty();
  talking = setInterval(() => leader.child()?.stdin?.write(READING), READING_MS);
  program = null;
});

afterEach(async () => {
  clearInterval(talking);
  program?.child.kill('SIGKILL');
  await leader.dispose();
  await follower.dispose();
  files.remove();
});

function start(...options: string[]): Program {
  const text = smallRigText({
    leaderPort: `serial:${leader.path}?baud=115200`,
    followers: [{ ...WREN, port: `serial:${follower.path}?baud=115200` }],
  });
  const rig = files.write('small.yaml', text);
  const child = spawn(
    process.execPath,
    ['--import', 'tsx', 'src/cli/main.ts', 'run', rig, '--join', '--json', ...options],
    {
      stdio: ['ignore', 'pipe', 'pipe'],
      env: { ...process.env, XDG_STATE_HOME: files.path('state') },
    },
  );
  let out = '';
  let err = '';
  child.stdout.on('data', (bytes: Buffer) => {
    out += bytes.toString();
    // Only the last whole line is looked at.
    const last = out.lastIndexOf('\n', out.length - 2);
    if (out.endsWith('\n') && last >= 0) out = out.slice(last + 1);
  });
  child.stderr.on('data', (bytes: Buffer) => {
    err += bytes.toString();
  });
  program = {
    child,
    ended: once(child, 'close').then(() => child.exitCode),
    status: () => {
      const whole = out.slice(0, out.lastIndexOf('\n') + 1).trimEnd();
      return whole === ''
        ? null
        : (JSON.parse(whole.slice(whole.lastIndexOf('\n') + 1)) as ReturnType<Program['status']>);
    },
    said: () => err,
  };
  return program;
}

/** Commands that have come whole over the follower's pseudo-terminal. */
function commands(): readonly string[] {
  return follower.received().toString().split('\n').slice(0, -1);
}

async function until(what: string, run: Program, condition: () => boolean): Promise<void> {
  try {
    await vi.waitUntil(condition, { interval: 20, timeout: LIMIT_MS });
  } catch (cause) {
    const seen = `last command ${commands().at(-1)}, status ${JSON.stringify(run.status())}, said ${run.said()}`;
    throw new Error(`waited in vain for ${what}: ${seen}`, { cause });
  }
}

const stateOf = (run: Program): string | undefined => run.status()?.followers[0]?.state;
const anglesOf = (run: Program): string =>
  (run.status()?.followers[0]?.joints ?? []).map(({ angle_deg }) => angle_deg.toFixed(9)).join();
const settled = (run: Program) => (): boolean =>
  stateOf(run) === 'following' && anglesOf(run) === '25.000000000,20.000000000' && commands().at(-1) === FOLLOWED;

describe('eidograph run over serial ports', () => {
  it('brings the arm where the remap says, holds on a first Ctrl-C and leaves on the second', async () => {
    const run = start();
    await until('the arm to follow', run, settled(run));
    for (const command of commands()) expect(command).toMatch(/^1[5-7]\d\d,1[5-7]\d\d$/);

    run.child.kill('SIGINT');
    await until('the arm to hold', run, () => stateOf(run) === 'holding');
    const before = commands().length;
    await until('commands to go on', run, () => commands().length > before + 3);
    expect(
      commands()
        .slice(before)
        .every((command) => command === FOLLOWED),
    ).toBe(true);
    expect(run.child.exitCode).toBeNull();

    run.child.kill('SIGINT');
    expect(await run.ended).toBe(130);
    expect(run.status()?.ended).toBe('interrupted');
  });

  it('brakes, holds and leaves on SIGTERM', async () => {
    const run = start();
    await until('the arm to follow', run, settled(run));
    run.child.kill('SIGTERM');
    expect(await run.ended).toBe(0);
    expect(run.status()?.ended).toBe('terminated');
    expect(commands().at(-1)).toBe(FOLLOWED);
  });

  it('parks the arm after its time and leaves', async () => {
    const run = start('--for', '12s');
    expect(await run.ended).toBe(0);
    expect(run.status()?.ended).toBe('parked');
    expect(commands()).toContain(FOLLOWED);
    expect(commands().at(-1)).toBe(RESTED);
  });
});
