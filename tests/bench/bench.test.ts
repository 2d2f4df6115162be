import { execFile } from 'node:child_process';
import { resolve } from 'node:path';
import { promisify } from 'node:util';
import { describe, expect, it } from 'vitest';
import type { Figures, Row } from '../../tools/bench/rounds.ts';
import { report } from '../../tools/bench/report.ts';
import { WIRE_US, type Target, targets } from '../../tools/bench/targets.ts';
import { WAYS } from '../../tools/bench/task.ts';

const ROOT = resolve(import.meta.dirname, '..', '..');
/** A dozen child processes one after another, on a machine that may be busy. */
const TINY_RUN_MS = 120_000;

function figuresOf(over: { readonly tight: number; readonly stock: number }, bytes: number): Figures {
  const row = (way: Row['way'], followers: number): Row => ({
    way,
    followers,
    time: time(10),
    bytes,
    bytesEs2015: way === 'whole' ? bytes / 2 : null,
    overProgram: way === 'tight' ? over.tight : way === 'stock' ? over.stock : 1,
  });
  const size = { followers: [16, 64], rounds: 1, warmUp: 0, readings: 1, paced: 1, pacedRounds: 1 };
  return { size, rows: WAYS.flatMap((way) => [row(way, 16), row(way, 64)]), paced: time(42), node: 'v20' };
}

function time(us: number): Figures['paced'] {
  return { medianUs: us, p99Us: us, worstUs: us, gc: { pauses: 0, longestUs: 0, shareOfTime: 0 }, commands: 1 };
}

describe('the bench', () => {
  it('measures every way in processes of its own and prints every row, every command sent', {
    timeout: TINY_RUN_MS,
  }, async () => {
    const bench = ['--import', 'tsx', resolve(ROOT, 'tools', 'bench.ts'), '--tiny', '--json'];
    const { stdout } = await promisify(execFile)(process.execPath, bench, { cwd: ROOT });
    const figures = JSON.parse(stdout) as Figures & { readonly targets: readonly Target[] };
    expect(figures.rows.map((row) => `${row.way} ${row.followers}`)).toEqual(WAYS.map((way) => `${way} 2`));
    for (const row of figures.rows) {
      expect(row.time.commands, `commands a reading, ${row.way}`).toBe(2);
      expect(row.time.medianUs, row.way).toBeGreaterThan(0);
      expect(row.time.worstUs, row.way).toBeGreaterThanOrEqual(row.time.p99Us);
      expect(row.bytes, `bytes a reading, ${row.way}`).toBeGreaterThanOrEqual(0);
    }
    expect(figures.paced.commands).toBe(2);
    expect(figures.targets.map((target) => target.what)).toContain('lag added at 1 kHz, 2 followers, p99');
  });

  it('says of each target whether it is met', () => {
    const good = targets(figuresOf({ tight: 1 / 1.2, stock: 9 }, 300));
    expect(good.find((t) => t.what === '(a) over (b), 16 followers')).toMatchObject({ measured: 1.2, met: true });
    expect(good.find((t) => t.what === '(c) over (a), 16 followers')).toMatchObject({ measured: 9, met: true });
    expect(good.find((t) => t.what === 'bytes a reading, 64 followers')).toMatchObject({ measured: 300, met: true });
    const bad = targets(figuresOf({ tight: 1 / 1.4, stock: 7 }, 600));
    expect(bad.filter((t) => !t.met).map((t) => t.what)).toEqual([
      '(a) over (b), 16 followers',
      '(a) over (b), 64 followers',
      '(c) over (a), 16 followers',
      '(d) over (a), 16 followers',
      'bytes a reading, 64 followers',
      "bytes a reading, RxJS's ES2015 build",
    ]);
  });

  it('prints a line for each way and each target', () => {
    const figures = figuresOf({ tight: 0.5, stock: 9 }, 300);
    const lines = report(figures).split('\n');
    expect(lines.filter((line) => /^ +(16|64) {2}\(/.test(line))).toHaveLength(2 * WAYS.length);
    expect(lines.filter((line) => /(^| )(not )?met$/.test(line))).toHaveLength(targets(figures).length);
  });

  it('reckons the time of one command on the wire: 30 bytes of ten bits at 115200 baud', () => {
    // Type, sequence, eight servos of three bytes and a CRC of two are 28; stuffing and the closing zero add two.
    // 30 * 10 / 115200 s = 2604.17 us.
    expect(WIRE_US).toBeCloseTo(2_604.17, 2);
  });
});
