import { spawnSync } from 'node:child_process';
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, afterEach, describe, expect, it } from 'vitest';
import { linesOf, type Screen, screen, until } from './screen.ts';

/** A measuring session at a real terminal, over simulated boards. */
const folder = mkdtempSync(join(tmpdir(), 'eidograph-fit-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const RIG = `rig: bench
leader: { leader: stick, port: "sim:hand?seed=7", wire: lines, counts: [0, 1023], joints: [{ name: base, channel: 0, points: [[100, -100], [900, 100]] }] }
followers:
  - follower: wren
    port: "sim:arm?name=wren"
    wire: { lines: { template: "{base.us}\\n" } }
    wake: ask
    joints: [{ name: base, from: base, range_deg: [-60, 60], speed_deg_s: 60, accel_deg_s2: 240, servo: { channel: 0, points: [[-90, 600], [90, 2400]] } }]
`;
const FILE = join(folder, 'bench.yaml');
writeFileSync(FILE, RIG);

let at: Screen;
afterEach(() => at.close());

const PROGRAM = ['--import', 'tsx', 'src/cli/main.ts'];
const FIT = `${process.execPath} ${PROGRAM.join(' ')} fit ${FILE}; echo status $?`;

describe('eidograph fit at a terminal', () => {
  it('lists its steps, draws the tape while a joint is swept, and leaves with what was captured kept', async () => {
    at = screen(FIT);
    await until(() => at.shown().includes('sweep of stick') && at.shown().includes('the board answers'));
    const sweep = /sweep of stick +(\d+) base/.exec(at.shown())?.[1] ?? '';
    at.type(`${sweep}\r`);
    // It is drawn five times a second, and a hundred readings, a second of them, make a sweep.
    await until(() => (at.shown().match(/\|[-#o]{50}\| \d+ /g) ?? []).length > 12);
    at.type('\r');
    await until(() => at.shown().includes('base: travel:'));
    at.type('quit\r');
    await until(() => at.shown().includes('status '));
    expect(at.shown()).toContain('The profiles are as they were.');
    expect(at.shown()).toContain('status 0');
    const kept = readFileSync(join(folder, 'bench.captures.csv'), 'utf8');
    expect(kept.split('\n').filter((line) => line.startsWith('leader-sweep,stick,base,')).length).toBeGreaterThan(99);
    expect(readFileSync(FILE, 'utf8')).toBe(RIG);
  });

  it.each([
    ['between two steps', []],
    ['while it asks whether the arm is safe', ['1']],
    ['while a joint is swept', ['sweep']],
    ['while a joint is to be held', ['points']],
    ['while a servo is away from its middle', ['travel', 'yes', '0']],
  ])('ends with 130 at Ctrl-C %s, and has written nothing', async (_, lines) => {
    const before = readdirSync(folder);
    at = screen(FIT);
    await until(() => at.shown().includes('Enter: 1 horn') && at.shown().includes('the board answers'));
    for (const line of lines) {
      const asked = questions(at).length;
      const step = new RegExp(`${line} of \\w+ +\\+?(\\d+) base`).exec(at.shown())?.[1];
      at.type(`${step ?? line}\r`);
      await until(() => questions(at).length > asked);
    }
    at.type('\x03');
    await until(() => at.shown().includes('status '));
    expect(at.shown()).toContain('status 130');
    expect(at.shown()).toContain('The profiles are as they were.');
    expect(readFileSync(FILE, 'utf8')).toBe(RIG);
    expect(readdirSync(folder).filter((name) => !before.includes(name) && !name.endsWith('.captures.csv'))).toEqual([]);
  });

  it('without a terminal says what to do instead, and opens and writes nothing', () => {
    const before = readdirSync(folder);
    const { status, stderr, stdout } = spawnSync(process.execPath, [...PROGRAM, 'fit', FILE], {
      encoding: 'utf8',
      stdio: ['ignore', 'pipe', 'pipe'],
    });
    expect([status, stdout]).toEqual([2, '']);
    expect(stderr).toBe(
      'error: there is no terminal to ask at; say --from captures.csv to fit what was recorded before\n',
    );
    expect(readdirSync(folder)).toEqual(before);
  });
});

/** Questions that have been asked so far, those drawn anew counted once. */
function questions(at: Screen): readonly string[] {
  return linesOf(at.shown()).filter((line, i, all) => /[:?] \S*$/.test(line) && line !== all[i - 1]);
}
