import { copyFileSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { balanceCommand } from '../../src/cli/balance.ts';
import { reportOf } from '../../src/check/report.ts';
import { loadProfile } from '../../src/rig/load.ts';
import { CRANE, CRANE_RIG } from '../check/crane.ts';
import { edited, fromMemory, STORK } from '../rig/memory.ts';
import type { Files } from '../rig/memory.ts';

let before: typeof process.exitCode;
beforeEach(() => {
  before = process.exitCode;
});
afterEach(() => {
  process.exitCode = before;
  vi.restoreAllMocks();
});

const CRANES: Files = { 'crane.yaml': CRANE, 'rig.yaml': CRANE_RIG, 'stork.yaml': CRANE };

async function ran(files: Files, ...args: readonly string[]) {
  const out: string[] = [];
  const err: string[] = [];
  const written = new Map<string, string>();
  const command = balanceCommand(
    { write: (text) => out.push(text) },
    { write: (text) => err.push(text) },
    fromMemory(files),
    (file, was, text, keep) => {
      expect(was).toBe(files[file]);
      written.set(file, text);
      return { kept: keep ? `${file}.old` : null };
    },
  )
    .exitOverride()
    .configureOutput({ writeErr: (text) => err.push(text) });
  await command.parseAsync(args, { from: 'user' }).catch((error: unknown) => {
    if (!(error instanceof Error && error.name === 'CommanderError')) throw error;
    process.exitCode = 2;
  });
  return { out: out.join(''), err: err.join(''), status: process.exitCode, written };
}

describe('eidograph balance', () => {
  it('says what each joint needs, from the tip inward, with status 0', async () => {
    const { out, err, status } = await ran(CRANES, 'crane.yaml', '--distance', '100');
    const lines = out.split('\n');
    expect(lines[0]).toBe(
      'stork, from the tip inward; torques are the worst over all ranges, with the payload or without',
    );
    // See the sums in the tests of the report: 150 g and 1125 g.
    expect(lines[2]).toMatch(/^ {2}elbow +150 g +\[0, 0, -100\] /);
    expect(lines[3]).toMatch(/^ {2}shoulder +1125 g +\[0, 0, -100\] /);
    expect(lines).toContain('what the weights cost');
    expect([err, status]).toEqual(['', 0]);
  });

  it('takes joints, masses, and a stock in pieces', async () => {
    const { out } = await ran(
      CRANES,
      'crane.yaml',
      '--joint',
      'elbow',
      '--distance',
      '100 mm',
      '--stock',
      '2x50 g, 20 g',
    );
    // 150 g: two of 50 and two or three of 20 are 140 or 160; one of 50 and five of 20 are 150 exactly.
    expect(out).toMatch(/elbow +1 × 50 g \+ 5 × 20 g /);
    expect(out).not.toMatch(/^ {2}shoulder +\d+ g/m);
    expect((await ran(CRANES, 'crane.yaml', '--joint', 'elbow', '--mass', '300')).out).toMatch(
      /elbow +300 g +\[0, 0, -50\]/,
    );
  });

  it('prints one object with --json', async () => {
    const { out } = await ran(CRANES, 'crane.yaml', '--json', '--distance', '100', '--joint', 'elbow');
    expect(JSON.parse(out)).toMatchObject({
      file: 'crane.yaml',
      profile: 'stork',
      joints: [{ joint: 'elbow', counterweight: { at_mm: [0, 0, -100] }, pieces: null, spring: { fixed: false } }],
      idle: [],
      cost: { joints: [{ joint: 'shoulder' }, { joint: 'elbow' }] },
    });
  });

  it('puts weights into the profile with --write, and leaves the rest to the byte', async () => {
    const { err, status, written } = await ran(CRANES, 'crane.yaml', '--distance', '100', '--write');
    const text = written.get('crane.yaml') ?? '';
    expect(text.replaceAll(/, counterweight: \{ mass_g: [\d.]+, at_mm: \[0, 0, -100\] \}/g, '')).toBe(CRANE);
    expect([err, status]).toEqual(['crane.yaml: written\n', 0]);
    const loaded = loadProfile('crane.yaml', fromMemory({ 'crane.yaml': text }));
    if ('mistakes' in loaded) throw new Error('a mistake was written');
    // What the check finds is what was promised: half of 0.05 kg at 0.2 m about the elbow.
    expect(reportOf(loaded).followers[0]?.joints[1]?.load_worst_nm).toBeCloseTo(9.80665 * 0.005, 2);
  });

  it('writes springs where they are asked for, and keeps the old file', async () => {
    const { err, written } = await ran(
      CRANES,
      'crane.yaml',
      '--joint',
      'shoulder',
      '--springs',
      '--free',
      '20',
      '--write',
      '--keep',
    );
    expect(written.get('crane.yaml')).toMatch(
      /drag_nm: 0\.1, spring: \{ n_per_mm: [\d.]+, free_mm: 20, from_mm: \[0, 0, 75\], to_mm: \[-2\.7, 0, 74\.9\] \} \}/,
    );
    expect(err).toBe('crane.yaml: written; the old one is crane.yaml.old\n');
  });

  it.each<[string, Files, readonly string[], RegExp]>([
    ['a rig', CRANES, ['rig.yaml'], /^rig\.yaml: this is a rig file; name the profile of one arm\n$/],
    [
      'a file with mistakes',
      { 'crane.yaml': edited(CRANE, ['rate_hz: 50', 'rate_hz: 0']) },
      ['crane.yaml'],
      /^crane\.yaml:4:10: rate_hz: /,
    ],
    ['a profile without an arm', { 'stork.yaml': STORK }, ['stork.yaml'], /^stork\.yaml: there is no arm: to balance/],
    [
      'a joint that is not there',
      CRANES,
      ['crane.yaml', '--joint', 'sholder'],
      /--joint: no link is turned by sholder; did you mean shoulder\?/,
    ],
    [
      'a distance and a mass at once',
      CRANES,
      ['crane.yaml', '--distance', '100', '--mass', '200'],
      /cannot be used with option '--mass <g>'/,
    ],
    ['a distance of nothing', CRANES, ['crane.yaml', '--distance', '0'], /A length is a number of millimetres above 0/],
    ['a mass that is none', CRANES, ['crane.yaml', '--mass', '1 kg'], /A mass is a number of grams above 0/],
    ['a stock that is none', CRANES, ['crane.yaml', '--stock', '50;100'], /A stock is a list of pieces in grams/],
    [
      'nothing to write',
      CRANES,
      ['crane.yaml', '--distance', '100', '--stock', '9000', '--write'],
      /^crane\.yaml: there is nothing to write\n$/,
    ],
  ])('refuses %s with status 2', async (_what, files, args, sentence) => {
    const { err, status, written } = await ran(files, ...args);
    expect(err).toMatch(sentence);
    expect([status, written.size]).toEqual([2, 0]);
  });

  it('says where to write when the links stand in another file', async () => {
    const files = { ...CRANES, 'twin.yaml': 'like: crane.yaml\nfollower: twin\n' };
    const { err, status, written } = await ran(files, 'twin.yaml', '--write');
    expect(err).toBe(
      'twin.yaml: arm.links[1].counterweight does not stand in this file but in one that it is like; balance that one\n',
    );
    expect([status, written.size]).toEqual([2, 0]);
  });

  it('says why a file could not be replaced', async () => {
    const err: string[] = [];
    const command = balanceCommand(
      { write: () => true },
      { write: (text) => err.push(text) },
      fromMemory(CRANES),
      () => ({
        wrong: 'crane.yaml has been changed meanwhile',
        right: 'look at it, and try again',
      }),
    );
    await command.parseAsync(['crane.yaml', '--write'], { from: 'user' });
    expect([err, process.exitCode]).toEqual([
      ['crane.yaml: crane.yaml has been changed meanwhile; look at it, and try again\n'],
      2,
    ]);
  });
});

describe('the stork', () => {
  it('holds its own shoulder once it is balanced, within what balance says is left', async () => {
    const folder = mkdtempSync(join(tmpdir(), 'eidograph-'));
    try {
      const file = join(folder, 'stork.yaml');
      copyFileSync('profiles/followers/stork.yaml', file);
      const out: string[] = [];
      const quiet = { write: () => true };
      for (const args of [
        ['--joint', 'elbow', '--distance', '300', '--write'],
        ['--joint', 'shoulder', '--distance', '500', '--write', '--json'],
      ]) {
        await balanceCommand({ write: (text) => (args.includes('--json') ? out.push(text) : 0) }, quiet).parseAsync(
          [file, ...args],
          { from: 'user' },
        );
      }
      const [shoulder] = JSON.parse(out.join('')).joints;
      const loaded = loadProfile(file);
      if ('mistakes' in loaded) throw new Error('a mistake was written');
      const checked = reportOf(loaded).followers[0]?.joints.find(({ joint }) => joint === 'shoulder');
      expect(checked?.load_worst_nm).toBeCloseTo(shoulder.after_nm, 2);
      // Its worm gear's drag is more than what is left: without power it stays where it is.
      expect(checked?.load_worst_nm).toBeLessThan(checked?.drag_nm ?? 0);
      expect(
        readFileSync(file, 'utf8')
          .split('\n')
          .filter((line) => line.includes('#')),
      ).toEqual(
        readFileSync('profiles/followers/stork.yaml', 'utf8')
          .split('\n')
          .filter((line) => line.includes('#')),
      );
    } finally {
      rmSync(folder, { recursive: true, force: true });
    }
  });
});
