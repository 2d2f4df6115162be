import { type ChildProcess, spawn } from 'node:child_process';
import { once } from 'node:events';
import { existsSync, statSync } from 'node:fs';
import { performance } from 'node:perf_hooks';
import { afterAll, afterEach, beforeAll, describe, expect, it, vi } from 'vitest';
import { isTakeFault } from '../../src/take/fault.ts';
import { openTake, type Take } from '../../src/take/reader.ts';
import { EVENT_CODES } from '../../src/take/row.ts';
import { scratch, smallRigText } from '../cli/rigs.ts';
import { noPty, pluggedPty, type Pty } from '../port/pty.ts';

/**
 * The program as it is started, killed with -9 while it records, over pseudo-terminals and in real time. It is judged by
 * what its file holds against readings whose numbers say when they were sent: how fast this machine is does not matter.
 */
const LIMIT_MS = 20_000;
const READING_MS = 10;
/** Counts of one joint run through this many numbers, for ten seconds. */
const NUMBERS = 1_000;
const LOSS_MAX_MS = 300;
/** Some batches. */
const ENOUGH_BYTES = 60_000;

let files: ReturnType<typeof scratch>;
let leader: Pty;
let follower: Pty;
let talking: NodeJS.Timeout;
let child: ChildProcess | null = null;
/** When each reading was sent, milliseconds; the one numbered n is the n-th of its ten seconds. */
const sentMs: number[] = [];
/** When the last command came. */
let commandMs = 0;

beforeAll(async () => {
  if (noPty !== null) throw new Error(`the smoke test needs pseudo-terminals: ${noPty}`);
  files = scratch();
  leader = await pluggedPty();
  follower = await pluggedPty();
  follower.child()?.stdout?.on('data', () => {
    commandMs = performance.now();
  });
  talking = setInterval(() => {
    leader.child()?.stdin?.write(`${sentMs.length % NUMBERS},500\r\n`);
    sentMs.push(performance.now());
  }, READING_MS);
});

afterEach(() => {
  child?.kill('SIGKILL');
});

afterAll(async () => {
  clearInterval(talking);
  await leader.dispose();
  await follower.dispose();
  files.remove();
});

const MAIN = ['--import', 'tsx', 'src/cli/main.ts'];
const takes = (): string => files.path('takes');

function program(...args: string[]): { readonly child: ChildProcess; said(): string } {
  const started = spawn(process.execPath, [...MAIN, ...args], {
    stdio: ['ignore', 'pipe', 'pipe'],
    env: { ...process.env, XDG_STATE_HOME: files.path('state') },
  });
  let said = '';
  for (const stream of [started.stdout, started.stderr])
    stream.on('data', (bytes: Buffer) => {
      said += bytes.toString();
    });
  child = started;
  return { child: started, said: () => said };
}

async function ended(...args: string[]): Promise<{ readonly status: number | null; readonly said: string }> {
  const run = program(...args);
  await once(run.child, 'close');
  return { status: run.child.exitCode, said: run.said() };
}

function recordArgs(name: string): string[] {
  const text = smallRigText({
    leaderPort: `serial:${leader.path}?baud=115200`,
    followers: [{ name: 'wren', port: `serial:${follower.path}?baud=115200` }],
  });
  const rig = files.write('small.yaml', text);
  return ['run', rig, '--join', '--json', '--take', name, '--takes', takes()];
}

/** Records until its file has grown by several batches and some more time has passed, then kills it. */
async function killed(name: string, moreMs: number): Promise<{ readonly take: Take; readonly aliveMs: number }> {
  const file = `${takes()}/${name}.arrows`;
  const run = program(...recordArgs(name));
  const from = commandMs;
  const isOn = (): boolean => existsSync(file) && commandMs > from && statSync(file).size > ENOUGH_BYTES;
  try {
    await vi.waitUntil(isOn, { interval: 5, timeout: LIMIT_MS });
  } catch (cause) {
    throw new Error(`waited in vain for a recording: ${run.said().slice(-2_000)}`, { cause });
  }
  const untilMs = performance.now() + moreMs;
  await vi.waitUntil(() => performance.now() > untilMs, { interval: 1, timeout: LIMIT_MS });
  const aliveMs = commandMs;
  run.child.kill('SIGKILL');
  await once(run.child, 'close');
  expect(run.child.signalCode).toBe('SIGKILL');
  const take = openTake(file);
  if (isTakeFault(take)) throw new Error(take.detail);
  return { take, aliveMs };
}

/** When, by this test's clock, the last row of a take was written down at the earliest. */
function lastRowMs(take: Take): number {
  // Readings need some time until they are stamped: the least of it, over all, ties the two clocks.
  let leastMs = Number.POSITIVE_INFINITY;
  let round = -1;
  let before = -1;
  let lastUs = 0;
  for (const { event, counts, tUs } of take.readFrom(0)) {
    lastUs = tUs;
    if (event !== EVENT_CODES.reading) continue;
    const number = counts[0] as number;
    if (round < 0) round = roundOf(take, number);
    else if (number < before) round++;
    before = number;
    const at = sentMs[round * NUMBERS + number];
    if (at !== undefined) leastMs = Math.min(leastMs, tUs / 1e3 - at);
  }
  return lastUs / 1e3 - leastMs;
}

/** A take is younger than a round: the last reading that had its first number began it. */
function roundOf(take: Take, number: number): number {
  expect(take.durationUs).toBeLessThan(NUMBERS * READING_MS * 1e3);
  const latest = Math.floor((sentMs.length - 1) / NUMBERS);
  const isLater = latest * NUMBERS + number >= sentMs.length;
  return isLater ? latest - 1 : latest;
}

describe('a recording that is killed with -9', () => {
  it.each([0, 70, 130])('loses at most 0.3 s, and opens (%d ms after a batch)', async (moreMs) => {
    const { take, aliveMs } = await killed(`cut-${moreMs}`, moreMs);
    expect(take.lostBytes).not.toBeNull();
    expect(take.damagedRows).toBe(0);
    const lostMs = aliveMs - lastRowMs(take);
    expect(lostMs).toBeLessThanOrEqual(LOSS_MAX_MS);
    take.close();
  });

  it('is told to be cut off, with what is left of it, and its name stays taken', async () => {
    const { take } = await killed('bow', 20);
    take.close();
    const size = statSync(`${takes()}/bow.arrows`).size;
    const shown = await ended('take', 'show', 'bow', '--takes', takes());
    expect([shown.status, shown.said]).toEqual([0, expect.stringMatching(/bow: it .*cut off after \d+\.\d\d s/)]);
    expect((await ended('take', 'list', '--takes', takes())).said).toMatch(/^bow .* cut off$/m);
    const again = await ended(...recordArgs('bow'));
    expect([again.status, again.said]).toEqual([2, expect.stringContaining('a take is never written over')]);
    expect(statSync(`${takes()}/bow.arrows`).size).toBe(size);
  });
});
