import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { checkCommand } from '../../src/cli/check.ts';
import { CRANE, CRANE_RIG } from '../check/crane.ts';
import { edited, fromMemory, RIG, STORK } from '../rig/memory.ts';
import type { Files } from '../rig/memory.ts';

const PLAIN: Files = { 'rig.yaml': RIG, 'stork.yaml': STORK };
const GOOD: Files = { 'rig.yaml': CRANE_RIG, 'stork.yaml': CRANE };
const BAD: Files = {
  ...PLAIN,
  'stork.yaml': edited(STORK, ['rate_hz: 50', 'rate_hz: 0'], ['from: shoulder', 'from: sholder']),
};
const OVER: Files = { ...GOOD, 'stork.yaml': edited(CRANE, ['stall_nm: 4,', 'stall_nm: 3,']) };

let before: typeof process.exitCode;
beforeEach(() => {
  before = process.exitCode;
});
afterEach(() => {
  process.exitCode = before;
});

async function ran(files: Files, ...args: readonly string[]) {
  const out: string[] = [];
  const err: string[] = [];
  const drawn = new Map<string, string>();
  const command = checkCommand(
    { write: (text) => out.push(text) },
    { write: (text) => err.push(text) },
    fromMemory(files),
    (file, text) => {
      if (file.startsWith('locked/')) throw new Error('permission denied');
      drawn.set(file, text);
    },
  );
  await command.parseAsync(args, { from: 'user' });
  return { out: out.join(''), err: err.join(''), status: process.exitCode, drawn };
}

describe('eidograph check', () => {
  it('says what a rig will do, on standard output, with status 0', async () => {
    const { out, err, status } = await ran(PLAIN, 'rig.yaml');
    expect(out.split('\n').filter((line) => !line.startsWith('    '))).toEqual([
      'rig.yaml: no mistakes',
      '',
      'leader hand: lines on serial:/dev/hand?baud=115200; shoulder, elbow, pedal (enable)',
      '  its line of columns fits 320 times a second; 1000 times would take 360000 baud',
      '',
      'follower stork: firmata on serial:/dev/stork?baud=57600; 6 bytes 50 times a second, 5 % of 57600 baud',
      '  no arm: in its file: reach, speed, load and tipping cannot be told',
      '  stop category 2: brakes, then holds; waking, it waits for the go in the pose that is shown',
      '  when pulses end, what the servos do is not known: if they go limp, of shoulder and elbow it cannot be told',
      '  when power ends, no servo holds: of shoulder and elbow it cannot be told',
      '',
    ]);
    // 60^2 / (2 * 240) = 7.5 degrees.
    expect(out).toMatch(/\n {4}shoulder +60 % +60 \/ 35 +-60\.\.85 +-20 +60 +240 +7\.50 +–\n/);
    expect([err, status]).toEqual(['', 0]);
  });

  it('says every mistake, one a line, on standard error, with status 2', async () => {
    const { out, err, status } = await ran(BAD, 'rig.yaml');
    expect(out).toBe('');
    expect(err).toBe(`stork.yaml:4:10: rate_hz: rate_hz is 0; give at least 1: commands a second, in hertz
stork.yaml:9:11: joints[0].from: the leader has no joint sholder; did you mean shoulder?
`);
    expect(status).toBe(2);
  });

  it('says what is over its limit, last, with status 1', async () => {
    const { out, err, status } = await ran(OVER, 'rig.yaml');
    expect(out.trimEnd().split('\n').at(-1)).toMatch(/^OVER {2}stork: shoulder has to hold 0\.93 Nm, 103 %/);
    expect([err, status]).toEqual(['', 1]);
  });

  it('takes one profile alone', async () => {
    const follower = await ran(GOOD, 'stork.yaml');
    expect(follower.out).toMatch(/^stork\.yaml: no mistakes\n\nfollower stork: /);
    expect(follower.status).toBe(0);
    const { out } = await ran(
      {
        'hand.yaml':
          'leader: hand\nport: sim:hand\nwire: frames\njoints: [{ name: a, channel: 0, points: [[0, 0], [9, 9]] }]\n',
      },
      'hand.yaml',
    );
    expect(out).toBe('hand.yaml: no mistakes\n\nleader hand: frames on sim:hand; a\n');
  });

  it('prints one object with --json, with every key a program may rely on', async () => {
    const { out, status } = await ran(GOOD, 'rig.yaml', '--json');
    const report = JSON.parse(out);
    expect(status).toBe(0);
    expect(report).toMatchObject({ file: 'rig.yaml', mistakes: [], over: [], leader: { leader: 'hand' } });
    expect(report.followers).toHaveLength(1);
    const [stork] = report.followers;
    expect(stork).toMatchObject({
      follower: 'stork',
      command_bytes: 6,
      baud: 57_600,
      wake: 'ask',
      reach_mm: 500,
      scale: 2,
      time_factor: 1.41421356,
      end_speed_max_mm_s: expect.any(Number),
      stopping_mm: expect.any(Number),
      tipping_margin_nm: expect.any(Number),
      sliding_margin_n: expect.any(Number),
      supply_worst_a: 3,
    });
    // 6 bytes of 10 bits (8N1), 50 times a second.
    expect(stork.baud_share).toBeCloseTo(3000 / 57_600, 9);
    expect(stork.joints[0]).toMatchObject({
      joint: 'shoulder',
      range_deg: [-60, 85],
      stopping_deg: 7.5,
      followed_share: expect.any(Number),
      mm_per_count: expect.any(Number),
      load_worst_nm: expect.any(Number),
      load_share: expect.any(Number),
      load_worst_pose_deg: [85, 5],
    });
  });

  it('prints null where the file gives no data', async () => {
    const { out } = await ran(PLAIN, 'rig.yaml', '--json');
    const [stork] = JSON.parse(out).followers;
    expect(stork).toMatchObject({
      reach_mm: null,
      scale: null,
      end_speed_max_mm_s: null,
      stopping_mm: null,
      tipping_margin_nm: null,
      sliding_margin_n: null,
      supply_worst_a: null,
      time_factor: null,
    });
    expect(stork.joints[0]).toMatchObject({
      mm_per_count: null,
      load_worst_nm: null,
      load_share: null,
      load_worst_pose_deg: null,
    });
  });

  it('prints mistakes with --json too', async () => {
    const { out, err, status } = await ran(BAD, 'rig.yaml', '--json');
    expect([status, err]).toEqual([2, '']);
    expect(JSON.parse(out)).toMatchObject({
      mistakes: [
        { code: 'RIG_VALUE_BOUNDS', file: 'stork.yaml', line: 4, column: 10, path: 'rate_hz' },
        { code: 'RIG_SOURCE_UNKNOWN', file: 'stork.yaml', line: 9, column: 11, path: 'joints[0].from' },
      ],
      leader: null,
      followers: [],
    });
  });

  it('draws the arms with --svg, and says so', async () => {
    const { err, status, drawn } = await ran(GOOD, 'rig.yaml', '--svg', 'arms.svg');
    expect([err, status]).toEqual(['arms.svg: drawn\n', 0]);
    const svg = drawn.get('arms.svg') ?? '';
    expect(svg).toMatch(/^<svg [^>]*>.*<\/svg>\n$/s);
    for (const words of ['yard', 'stork: 500 mm reach', '>rest<', 'highest load on shoulder', 'held down by'])
      expect(svg, words).toContain(words);
  });

  it('draws no mistakes, and says what there is not to draw', async () => {
    expect((await ran(BAD, 'rig.yaml', '--svg', 'arms.svg')).drawn.size).toBe(0);
    const { err, status, drawn } = await ran(PLAIN, 'rig.yaml', '--svg', 'arms.svg');
    expect([err, status, drawn.size]).toEqual(["arms.svg: nothing to draw; give arm: in a follower's file\n", 2, 0]);
  });

  it('says why it cannot draw there', async () => {
    const { err, status } = await ran(GOOD, 'rig.yaml', '--svg', 'locked/arms.svg');
    expect(err).toBe(
      'locked/arms.svg cannot be written: permission denied; name a file in a folder that may be written\n',
    );
    expect(status).toBe(2);
  });

  it('reads from the disk and writes to it by itself', async () => {
    const folder = mkdtempSync(join(tmpdir(), 'eidograph-'));
    try {
      const out: string[] = [];
      const command = checkCommand({ write: (text) => out.push(text) }, { write: () => true });
      await command.parseAsync(['profiles/followers/wren.yaml', '--svg', join(folder, 'wren.svg')], { from: 'user' });
      expect(out.join('')).toContain('follower wren: ');
      expect(readFileSync(join(folder, 'wren.svg'), 'utf8')).toContain('wren: 180 mm reach');
    } finally {
      rmSync(folder, { recursive: true, force: true });
    }
  });
});

/** Three arms are searched over all their ranges: a second and a half alone, more beside other work. */
const YARD_MS = 60_000;

describe('the Lantern Yard', () => {
  it(
    'is within every limit',
    async () => {
      const out: string[] = [];
      await checkCommand({ write: (text) => out.push(text) }).parseAsync(
        ['profiles/rigs/lantern-yard.yaml', '--json'],
        {
          from: 'user',
        },
      );
      const { over, followers } = JSON.parse(out.join(''));
      expect([over, process.exitCode]).toEqual([[], 0]);
      expect(followers.map(({ follower, scale }: { follower: string; scale: number }) => [follower, scale])).toEqual([
        // 180, 600 and 1900 mm against 400 mm.
        ['wren', 0.45],
        ['heron', 1.5],
        ['stork', 4.75],
      ]);
    },
    YARD_MS,
  );
});
