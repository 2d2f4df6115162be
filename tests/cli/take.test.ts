import { existsSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { Writable } from 'node:stream';
import { afterEach, beforeAll, describe, expect, it } from 'vitest';
import { takeCommand } from '../../src/cli/take.ts';
import type { TakeWorld } from '../../src/cli/take-world.ts';
import { traceFiles } from '../../src/cli/trace.ts';
import { virtualClock } from '../../src/clock/virtual.ts';
import { EVENT_CODES } from '../../src/take/row.ts';
import { fileWriter, filmed, headerOf, takesFolderForTests, TWO_ARMS } from '../take/studio.ts';
import { rigYaml } from '../bridge/performance.ts';

const folder = takesFolderForTests();

beforeAll(async () => {
  for (const [name, s] of [
    ['bow', 6],
    ['bow-again', 7],
  ] as const) {
    const { performance, recorder } = filmed(folder, name);
    performance.run(2_000_000);
    recorder.mark('down');
    performance.live.key('mark');
    performance.run(s * 1_000_000 - 2_000_000);
    await recorder.end();
  }
});

afterEach(() => {
  process.exitCode = undefined;
});

interface Ran {
  readonly status: number;
  readonly out: string;
  readonly err: string;
}

/** Time passes by itself: whoever waits is woken at once. */
function worldOf(text: { out: string; err: string }, interruptAfter = Number.POSITIVE_INFINITY): TakeWorld {
  const clock = virtualClock(0);
  let looks = 0;
  let leave: () => void = () => {};
  return {
    clock: {
      nowUs: () => {
        looks++;
        if (looks > interruptAfter) leave();
        clock.runTo(clock.nowUs() + 50_000);
        return clock.nowUs();
      },
      at: (atUs, wake) => {
        const cancel = clock.at(atUs, wake);
        queueMicrotask(() => clock.runTo(atUs));
        return cancel;
      },
    },
    env: { XDG_DATA_HOME: '/nowhere' },
    out: { write: (bytes) => (text.out += typeof bytes === 'string' ? bytes : Buffer.from(bytes).toString()) },
    err: { write: (more) => (text.err += more) },
    watched: true,
    onInterrupt(call) {
      leave = call;
      return () => {};
    },
  };
}

async function take(args: string, interruptAfter?: number): Promise<Ran> {
  const text = { out: '', err: '' };
  const command = takeCommand(() => worldOf(text, interruptAfter)).exitOverride();
  await command.parseAsync([...args.split(' '), '--takes', folder], { from: 'user' });
  return { status: Number(process.exitCode ?? 0), ...text };
}

describe('eidograph take', () => {
  it('lists takes with their length, rows, marks and parents', async () => {
    await take('trim bow --from down --as bow-end');
    const { out } = await take('list --json');
    const { takes } = JSON.parse(out) as { takes: Record<string, unknown>[] };
    expect(takes.map((one) => [one['take'], one['made_by'], one['parents'], one['marks']])).toEqual([
      ['bow', 'record', [], 1],
      ['bow-again', 'record', [], 1],
      ['bow-end', 'trim', ['bow'], 1],
    ]);
    expect((await take('list')).out).toMatch(/bow-end +4\.0 s .*trim of bow/);
  });

  it('shows what a take holds, for people and for programs', async () => {
    const shown = JSON.parse((await take('show bow --json')).out) as Record<string, unknown>;
    expect(shown).toMatchObject({ take: 'bow', duration_s: 6, marks: [{ mark: 'down', t_s: 2 }] });
    expect(shown['rows']).toBeGreaterThan(1000);
    expect((await take('show bow')).out).toMatch(
      /bow: recorded from rehearsal, 6\.00 s[^]*follower wren: \d+ commands/,
    );
    // Nothing that a terminal of 80 columns would break.
    for (const line of (await take('show bow')).out.split('\n')) expect(line.length).toBeLessThanOrEqual(80);
  });

  it('draws a take, whole, and never over a file that is there', async () => {
    const file = join(folder, 'bow.svg');
    const { status, out, err } = await take(`show bow --svg ${file} --only wren`);
    expect([status, err]).toEqual([0, `${file}: drawn\n`]);
    expect(out).toMatch(/^bow: recorded/);
    const svg = readFileSync(file, 'utf8');
    expect(svg).toMatch(/^<svg [^]*>leader handstick<[^]*>wren<[^]*<\/svg>\n$/);
    expect(svg).toContain('>down</text>');
    expect(svg).not.toContain('>stork<');
    const again = await take(`show bow --svg ${file}`);
    expect([again.status, again.err]).toEqual([2, expect.stringContaining('it is there already')]);
    expect(readFileSync(file, 'utf8')).toBe(svg);
    const strange = await take(`show bow --svg ${file}2 --only crow`);
    expect([strange.status, strange.err]).toEqual([2, expect.stringContaining('it has no follower crow')]);
    expect(existsSync(`${file}2`)).toBe(false);
  });

  it('orders demonstrations, the best first, each with what it was judged by', async () => {
    const plain = await take('best bow bow-again');
    expect(plain.status).toBe(0);
    const lines = plain.out.trimEnd().split('\n');
    expect(new Set(lines.map((line) => line.split(' ')[0]))).toEqual(new Set(['bow', 'bow-again']));
    expect(lines[0]).toMatch(/places: arc length -\d+\.\d\d, jerk -\d+\.\d\d, held back \d+\.\d s, \d+ dropouts, \d/);
    const { takes } = JSON.parse((await take('best bow bow-again --json')).out) as {
      takes: readonly { take: string; places: number }[];
    };
    expect(takes.map((one) => one.take)).toEqual(lines.map((line) => line.split(' ')[0]));
    expect(takes[0]?.places).toBeLessThanOrEqual(takes[1]?.places ?? 0);
    const alone = await take('best bow');
    expect([alone.status, alone.err]).toEqual([2, expect.stringContaining('there is no other take to choose from')]);
  });

  it('compares two takes', async () => {
    const { joints } = JSON.parse((await take('compare bow bow-again --json')).out) as {
      joints: { joint: string; rms_deg: number }[];
    };
    expect(joints[0]).toMatchObject({ joint: 'leader.base' });
    // The same simulated hand, a second longer.
    expect((await take('compare bow bow')).out).toMatch(/leader\.base +0\.00 deg rms/);
  });

  it('exports to a file, whole, and never over one that is there', async () => {
    const file = join(folder, 'bow.csv');
    expect((await take(`export bow --out ${file} --columns t_us,wren.*`)).status).toBe(0);
    const lines = readFileSync(file, 'utf8').split('\n');
    expect(lines[0]).toMatch(/^t_us,wren\.commanded,wren\.state/);
    const again = await take(`export bow --out ${file}`);
    expect([again.status, again.err]).toEqual([2, expect.stringContaining('it is there already')]);
    expect(readFileSync(file, 'utf8').split('\n')).toHaveLength(lines.length);
    expect((await take('export bow --columns wing.*')).status).toBe(2);
  });

  it('leaves no half file when it is interrupted', async () => {
    const file = join(folder, 'half.parquet');
    const { status } = await take(`export bow bow-again --out ${file}`, 2);
    expect(status).toBe(130);
    expect(existsSync(file)).toBe(false);
    expect(readdirSync(folder).filter((name) => name.startsWith('.'))).toEqual([]);
  });

  it.each([
    ['show nothing', /nothing: there is no such take in .*take list/],
    ['show bwo', /bwo: there is no such take in .*, but one that is called bow; name one that/],
    ['show ..', /this is no name for a take; use letters/],
    ['show bow/../../etc/passwd', /this is no name for a take; use letters/],
    ['show bow --svg nowhere/bow.svg', /nowhere\/bow.svg: there is no folder .*nowhere; name another file/],
    ['export bow --out nowhere/bow.csv', /nowhere\/bow.csv: there is no folder .*nowhere; name another file/],
    ['show ../bow', /this is no name for a take; use letters/],
    ['trim bow --from 3s --to 2s --as x', /3 s to 2 s is no stretch of its 6 s/],
    ['trim bow --from never --as x', /it has no mark "never"/],
    ['trim bow --as bow-again', /there is a take of this name; choose another name/],
    ['splice bow bow --as a/b', /this is no name for a take/],
  ])('refuses "%s" with a remedy and status 2', async (args, sentence) => {
    const { status, err } = await take(args);
    expect([status, err]).toEqual([2, expect.stringMatching(sentence)]);
  });

  it('lists what cannot be read with what is the matter', async () => {
    writeFileSync(join(folder, 'nothing.arrows'), '');
    writeFileSync(join(folder, 'letter.arrows'), 'Dear stork, '.repeat(30));
    const { out, status } = await take('list');
    expect(status).toBe(0);
    expect(out).toMatch(/^nothing +cannot be read: there is nothing in it$/m);
    expect(out).toMatch(/^letter +cannot be read: it is no Arrow stream/m);
    const { takes } = JSON.parse((await take('list --json')).out) as { takes: Record<string, unknown>[] };
    expect(takes.find((one) => one['take'] === 'nothing')).toMatchObject({ fault: 'TAKE_EMPTY' });
  });

  it('opens a take that was cut, and says so', async () => {
    const bytes = readFileSync(join(folder, 'bow.arrows'));
    writeFileSync(join(folder, 'cut.arrows'), bytes.subarray(0, bytes.length * 0.6));
    const { status, err, out } = await take('show cut');
    expect(status).toBe(0);
    expect(err).toMatch(/cut: it was cut off after \d\.\d\d s: its last \d+ bytes are no whole batch/);
    expect(out).toMatch(/cut: recorded from rehearsal/);
  });
});

describe('eidograph trace', () => {
  const RIG_TEXT = rigYaml([
    ['wren', 'sim:arm?name=wren'],
    ['stork', 'sim:arm?name=stork'],
  ]);

  async function traced(
    name: string,
  ): Promise<{ readonly status: number; readonly said: string; readonly rows: string[] }> {
    const rig = join(folder, 'rig.yaml');
    writeFileSync(rig, RIG_TEXT);
    let out = '';
    const stdout = new Writable({
      write(bytes: Buffer, _, done) {
        out += bytes.toString();
        done();
      },
    });
    let said = '';
    const options = { in: join(folder, `${name}.arrows`), out: undefined, from: undefined };
    const say = (text: string): void => {
      said += text;
    };
    const status = await traceFiles(rig, options, { stdin: null, stdout, say });
    return { status, said, rows: out.trim().split('\n') };
  }

  it('reads a take: the commands of its readings on a rig', async () => {
    const { status, said, rows } = await traced('bow');
    expect([status, said]).toEqual([0, '']);
    expect(rows[0]).toBe('t_ms,follower,state,joint,target_deg,angle_deg,pulse_us');
    expect(rows.length).toBeGreaterThan(2 * TWO_ARMS.plan.followers.length * 200);
  });

  it('reads the poses of a take whose counts do not tell them', async () => {
    await take('splice bow bow-again --blend 2s --as spliced');
    const { status, said, rows } = await traced('spliced');
    expect([status, said]).toEqual([0, '']);
    const angles = rows
      .map((row) => row.split(','))
      .filter(([ms, arm, , joint]) => Number(ms) > 6_200 && Number(ms) < 7_800 && arm === 'wren' && joint === 'base')
      .map(([, , state, , target]) => [state, Number(target)] as const);
    // In the blend there are poses and no readings: the arm goes on following, and moves.
    expect(angles.length).toBeGreaterThan(70);
    expect(new Set(angles.map(([state]) => state))).toEqual(new Set(['following']));
    expect(new Set(angles.map(([, target]) => target)).size).toBeGreaterThan(50);
  });

  it('reads the poses of a take that was smoothed, however it was cut afterwards', async () => {
    await take('smooth bow --cutoff 0.5 --as calm');
    await take('trim calm --from 1s --to 5s --as calm-cut');
    await take('trim bow --from 1s --to 5s --as bow-cut');
    const targets = async (name: string, fromMs: number): Promise<readonly number[]> =>
      (await traced(name)).rows
        .map((row) => row.split(','))
        .filter(([ms, arm, , joint]) => Number(ms) >= fromMs && arm === 'wren' && joint === 'base')
        .slice(0, 100)
        .map(([, , , , target]) => Number(target));
    // Two seconds into the cut the arms have long met.
    const [whole, cut, raw] = [
      await targets('calm', 3_000),
      await targets('calm-cut', 2_000),
      await targets('bow-cut', 2_000),
    ];
    const apart = (a: readonly number[], b: readonly number[]): number =>
      Math.max(...a.map((target, i) => Math.abs(target - (b[i] ?? Number.NaN))));
    expect(whole.length).toBe(100);
    expect(apart(cut, whole)).toBeLessThan(0.5);
    expect(apart(cut, raw)).toBeGreaterThan(1);
  });

  it('refuses a take whose arms were led by commands, with a remedy', async () => {
    const writer = fileWriter(folder, 'commanded', headerOf(TWO_ARMS));
    for (let i = 0; i < 100; i++) {
      Object.assign(writer.row, { tUs: i * 10_000, event: EVENT_CODES.target, follower: 0 });
      writer.append();
    }
    await writer.end();
    const { status, said } = await traced('commanded');
    expect([status, said]).toEqual([2, expect.stringMatching(/led by commands.*play it with --as-commands/)]);
  });
});
