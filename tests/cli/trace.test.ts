import { readFileSync } from 'node:fs';
import { Readable, Writable } from 'node:stream';
import { afterAll, describe, expect, it } from 'vitest';
import { startPoses } from '../../src/cli/start-poses.ts';
import { traceFiles, type TraceOptions } from '../../src/cli/trace.ts';
import { scratch, smallRig, smallRigText } from './rigs.ts';

const files = scratch();
afterAll(() => files.remove());

const DEADBAND = 'gain: 0.5, offset_deg: 5, deadband_deg: 2, range_deg: [-20, 30], speed_deg_s: 60, accel_deg_s2: 240';
const REVERSED = 'direction: reversed, range_deg: [-40, 40], speed_deg_s: 60, accel_deg_s2: 240';
const POSES = 'wake: ask, poses: { bow: { base: 20, elbow: -30 } }';
const RIG = files.write(
  'small.yaml',
  smallRigText({ followers: [{ name: 'wren', keys: POSES, base: DEADBAND, elbow: REVERSED }, { name: 'stork' }] }),
);

interface Told {
  readonly status: number;
  readonly out: string;
  readonly said: string;
}

async function traced(text: string | null, options: Partial<TraceOptions> = {}, highWaterMark = 1_000): Promise<Told> {
  const out: string[] = [];
  const said: string[] = [];
  const stdout = new Writable({
    highWaterMark,
    write(chunk: Buffer, _, done) {
      out.push(chunk.toString());
      done();
    },
  });
  const status = await traceFiles(
    RIG,
    { in: undefined, out: undefined, from: undefined, ...options },
    { stdin: text === null ? null : Readable.from([Buffer.from(text)]), stdout, say: (line) => said.push(line) },
  );
  return { status, out: out.join(''), said: said.join('') };
}

function rowsOf(out: string): Record<string, string>[] {
  const [header = '', ...rows] = out.trimEnd().split('\n');
  const names = header.split(',');
  return rows.map((row) => Object.fromEntries(row.split(',').map((cell, i) => [names[i] ?? '', cell])));
}

/** A leader that stands at these counts for `seconds`, 100 readings a second. */
const standing = (base: number, elbow: number, seconds: number, startMs = 0): string =>
  Array.from({ length: seconds * 100 }, (_, i) => `${startMs + i * 10},${base},${elbow}\n`).join('');
const HEADER = 't_ms,base,elbow\n';

describe('A trace', () => {
  it('ends where the remap says, worked out by hand', async () => {
    // base: 700 counts are 40 degrees; 0.5 * 40 + 5 = 25; the deadband trails by 2: 23 degrees, 1500 + 230 us.
    // elbow: 400 counts are -20 degrees; reversed: 20 degrees, 1700 us.
    const { status, out } = await traced(HEADER + standing(700, 400, 2));
    expect(status).toBe(0);
    const rows = rowsOf(out);
    const last = (joint: string) => rows.findLast((row) => row['follower'] === 'wren' && row['joint'] === joint);
    expect(Number(last('base')?.['target_deg'])).toBeCloseTo(23, 9);
    expect(Number(last('base')?.['angle_deg'])).toBeCloseTo(23, 9);
    expect(last('base')?.['pulse_us']).toBe('1730');
    expect(Number(last('elbow')?.['target_deg'])).toBeCloseTo(20, 9);
    expect(last('elbow')?.['pulse_us']).toBe('1700');
  });

  it('clamps the target to the range', async () => {
    // 950 counts are 90 degrees; 0.5 * 90 + 5 = 50, and the range ends at 30: 1800 us.
    const { out } = await traced(HEADER + standing(950, 500, 2));
    const last = rowsOf(out).findLast((row) => row['follower'] === 'wren' && row['joint'] === 'base');
    expect(Number(last?.['target_deg'])).toBeCloseTo(30, 9);
    expect(last?.['pulse_us']).toBe('1800');
  });

  it('has a row for each joint of each command, in order, joins at once and brakes when the readings end', async () => {
    const { out } = await traced(HEADER + standing(600, 450, 4, 5_000));
    expect(out.startsWith('t_ms,follower,state,joint,target_deg,angle_deg,pulse_us\n5000,wren,joining,base,')).toBe(
      true,
    );
    const rows = rowsOf(out);
    expect(rows.slice(0, 4).map((row) => `${row['follower']} ${row['joint']}`)).toEqual([
      'wren base',
      'wren elbow',
      'stork base',
      'stork elbow',
    ]);
    expect(new Set(rows.map((row) => row['state']))).toEqual(new Set(['joining', 'following', 'holding']));
    expect(rows.at(-1)?.['state']).toBe('holding');
    const times = rows.map((row) => Number(row['t_ms']));
    expect(times).toEqual([...times].sort((a, b) => a - b));
  });

  it('prints numbers in their shortest form that reads back as the same number', async () => {
    const { out } = await traced(HEADER + standing(701, 333, 1));
    for (const row of rowsOf(out)) {
      for (const name of ['t_ms', 'target_deg', 'angle_deg', 'pulse_us']) {
        const text = row[name] as string;
        expect(String(Number(text))).toBe(text);
      }
    }
  });

  it('starts at rest, or in a pose that is named or given', async () => {
    const first = async (from: string | undefined) => {
      const rows = rowsOf((await traced(`${HEADER}0,500,500\n`, { from })).out);
      return rows.slice(0, 4).map((row) => Number(row['angle_deg']));
    };
    // A first command is one period of joining away from the start: well under a degree.
    const near = (angles: readonly number[]) => angles.map((angle) => expect.closeTo(angle, 0));
    expect(await first(undefined)).toEqual(near([0, 0, 0, 0]));
    expect(await first('bow')).toEqual(near([20, -30, 0, 0]));
    expect(await first('elbow=10')).toEqual(near([0, 10, 0, 10]));
    expect(await first('stork.base=-12.5, wren.base=3')).toEqual(near([3, 0, -12.5, 0]));
  });

  it('is the same whatever the size of the portions', async () => {
    const text = HEADER + standing(700, 400, 4) + standing(200, 600, 4, 4_000);
    const whole = await traced(text, {}, 10_000_000);
    const portions = await traced(text, {}, 1);
    expect(portions.out === whole.out).toBe(true);
  });

  it('goes through a pause of two hours between two readings in bounded portions', async () => {
    let largest = 0;
    const stdout = new Writable({
      write(chunk: Buffer, _, done) {
        largest = Math.max(largest, chunk.length);
        done();
      },
    });
    const stdin = Readable.from([Buffer.from(`${HEADER}0,500,500\n7200000,500,500\n`)]);
    const options = { in: undefined, out: undefined, from: undefined };
    expect(await traceFiles(RIG, options, { stdin, stdout, say() {} })).toBe(0);
    expect(largest).toBeGreaterThan(60_000);
    expect(largest).toBeLessThan(200_000);
  });

  it('reads from a file and writes to one', async () => {
    const input = files.write('readings.csv', HEADER + standing(700, 400, 1));
    const output = files.path('commands.csv');
    const { status, out } = await traced(null, { in: input, out: output });
    expect(status).toBe(0);
    expect(out).toBe('');
    const { out: same } = await traced(HEADER + standing(700, 400, 1));
    expect(readFileSync(output, 'utf8')).toBe(same);
  });

  it('of no reading has a header and no row', async () => {
    expect(await traced(HEADER)).toEqual({
      status: 0,
      out: 't_ms,follower,state,joint,target_deg,angle_deg,pulse_us\n',
      said: '',
    });
  });
});

describe('A trace that cannot be', () => {
  it('tells mistakes in the readings by line and column, with status 2 and no command after them', async () => {
    const { status, out, said } = await traced(`${HEADER}0,500,500\n10,5000,500\n20,500,500\n`);
    expect(status).toBe(2);
    expect(said).toBe('(standard input):3:4: the converter cannot read 5000; its counts go from 0 to 1000\n');
    expect(rowsOf(out).every((row) => Number(row['t_ms']) <= 10)).toBe(true);
  });

  it('prints nothing at all when the header is wrong', async () => {
    const { status, out } = await traced('t_ms,base\n0,1\n');
    expect([status, out]).toEqual([2, '']);
  });

  it('says that a file is missing, with status 2', async () => {
    const { status, said } = await traced(null, { in: files.path('nowhere.csv') });
    expect(status).toBe(2);
    expect(said).toContain('nowhere.csv');
  });

  it('asks for readings where nothing is piped in', async () => {
    expect(await traced(null)).toMatchObject({ status: 2, said: expect.stringContaining('--in') as string });
  });

  it('ends quietly when nobody reads its commands any more', async () => {
    const stdout = new Writable({
      write: (_chunk, _encoding, done) => done(Object.assign(new Error('EPIPE'), { code: 'EPIPE' })),
    });
    const stdin = Readable.from([Buffer.from(HEADER + standing(700, 400, 1))]);
    const said: string[] = [];
    const options = { in: undefined, out: undefined, from: undefined };
    expect(await traceFiles(RIG, options, { stdin, stdout, say: (text) => said.push(text) })).toBe(0);
    expect(said).toEqual([]);
  });

  it('fails with status 1 when what it writes cannot be kept', async () => {
    const stdout = new Writable({
      write: (_chunk, _encoding, done) => done(Object.assign(new Error('ENOSPC: no space left'), { code: 'ENOSPC' })),
    });
    const stdin = Readable.from([Buffer.from(HEADER + standing(700, 400, 1))]);
    const options = { in: undefined, out: undefined, from: undefined };
    expect(await traceFiles(RIG, options, { stdin, stdout, say() {} })).toBe(1);
  });
});

describe('--from', () => {
  const rig = smallRig({ followers: [{ name: 'wren', keys: POSES }, { name: 'stork' }] });

  it.each([
    ['bwo', 'no follower has a pose bwo; did you mean bow?'],
    ['curtsy', 'no follower has a pose curtsy; the profiles name bow'],
    ['elbwo=3', 'there is no joint elbwo; did you mean elbow?'],
    ['crow.knee=3', 'there is no joint crow.knee; there are wren.base, wren.elbow, stork.base, stork.elbow'],
    ['base=up', '"base=up" is no angle; write joint=degrees'],
    ['stork.base=41', 'base of stork does not reach 41 degrees; stay inside its range_deg'],
  ])('%s is a mistake, and the remedy is told', (text, expected) => {
    expect(startPoses(rig, text)).toEqual({ mistakes: [expect.stringContaining(expected)] });
  });
});
