import { readFileSync } from 'node:fs';
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest';
import { asyncBufferFromFile, parquetReadObjects } from 'hyparquet';
import { demoCommand } from '../../src/cli/demo.ts';
import { takeCommand } from '../../src/cli/take.ts';
import type { TakeWorld } from '../../src/cli/take-world.ts';
// What a command loads only when it is called is loaded already: no clock of a test waits for that.
import '../../src/cli/take-edit.ts';
import '../../src/cli/take-export.ts';
import '../../src/cli/take-play.ts';
import '../../src/cli/take-recording.ts';
import '../../src/cli/take-show.ts';
import { scratch } from './rigs.ts';
import { stage, type Stage } from './stage.ts';

/** README's session with takes, command by command as it is printed there, at a terminal of 80 columns. */
const SESSION = sessionOf(readFileSync('README.md', 'utf8'));
const files = scratch();
afterAll(() => files.remove());
afterEach(() => {
  process.exitCode = undefined;
});

interface Ran {
  readonly command: string;
  readonly status: number;
  readonly out: string;
  readonly err: string;
  /** Every screen it has shown, at most ten a second. */
  readonly screens: readonly string[];
}

function sessionOf(readme: string): readonly string[] {
  const takes = readme.slice(readme.indexOf('\n## Takes\n'));
  const block = /```sh\n([^]*?)```/.exec(takes)?.[1] ?? '';
  return block
    .split('\n')
    .map((line) => line.replace(/\s+#.*$/, ''))
    .filter((line) => line.startsWith('eidograph '));
}

/** Words as a shell splits them; files that are written go to the scratch folder. */
function argsOf(command: string): string[] {
  const words = (command.match(/"[^"]*"|\S+/g) ?? []).map((word) => word.replaceAll('"', '')).slice(1);
  return [
    ...words.map((word, i) => (['--svg', '--out'].includes(words[i - 1] ?? '') ? files.path(word) : word)),
    '--takes',
    files.path('takes'),
  ];
}

/** Somebody at the keyboard: marks while recording, and lets arms start that wait for it. */
function hand(on: Stage, command: string, ms: number): void {
  if (command.includes(' demo ') && (ms === 4_000 || ms === 16_000)) on.type('m');
  if (ms % 1_000 === 0 && on.screen().includes('waking')) on.type('g');
}

async function ran(command: string): Promise<Ran> {
  const on = stage({ terminal: true, env: { XDG_STATE_HOME: files.path('state') }, size: { columns: 80, rows: 40 } });
  const text = { out: '', err: '' };
  const world: TakeWorld = {
    clock: on.clock,
    env: {},
    out: { write: (bytes) => (text.out += typeof bytes === 'string' ? bytes : Buffer.from(bytes).toString()) },
    err: { write: (more) => (text.err += more) },
    watched: false,
    onInterrupt: () => () => {},
  };
  const [name, ...args] = argsOf(command);
  const program =
    name === 'demo'
      ? demoCommand(() => on.world)
      : takeCommand(
          () => world,
          () => on.world,
        );
  let isOver = false;
  const parsed = program.exitOverride().parseAsync(args, { from: 'user' });
  void parsed.finally(() => {
    isOver = true;
  });
  const screens: string[] = [];
  for (let ms = 0; !isOver; ms += 100) {
    if (ms > 300_000) throw new Error(`${command}: it has not ended; it shows\n${on.screen()}\n${on.err()}`);
    hand(on, command, ms);
    await on.pass(100);
    // The disk is a real one: it writes while nobody waits for it.
    await new Promise((resume) => setImmediate(resume));
    if (on.isOpen() && on.screen() !== screens.at(-1)) screens.push(on.screen());
  }
  await parsed;
  const status = Number(process.exitCode ?? 0);
  process.exitCode = undefined;
  return { command, status, out: text.out + on.out(), err: text.err + on.err(), screens };
}

describe('the session with takes that the README shows', () => {
  const done: Ran[] = [];
  const by = (word: string): Ran => {
    const found = done.find(({ command }) => command.includes(` ${word}`));
    if (found === undefined) throw new Error(`the session has no ${word}`);
    return found;
  };

  beforeAll(async () => {
    for (const command of SESSION) done.push(await ran(command));
  }, 120_000);

  it('has every step of the job, and each ends with status 0', () => {
    expect(done.map(({ command }) => command.split(' ').slice(1, 3).join(' '))).toEqual([
      'demo --take',
      'take show',
      'take trim',
      'take layer',
      'take play',
      'take compare',
      'take export',
      'take list',
    ]);
    for (const { command, status, err } of done) expect([command, status, err]).toEqual([command, 0, err]);
  });

  it('records with named marks, and shows that it does', () => {
    const { screens } = by('demo');
    expect(screens.some((screen) => /recording bow \d+ s/.test(screen))).toBe(true);
    expect(by('demo').err).toMatch(/^recorded bow: 20\.0 s, \d+ rows, 2 marks, in /m);
    expect(by('take show').out).toMatch(/marks: down \d+\.\d\d s, up \d+\.\d\d s/);
    expect(readFileSync(files.path('bow.svg'), 'utf8')).toContain('>down</text>');
  });

  it('plays the whole layer while it is recorded, and parks', () => {
    const { screens, err } = by('layer');
    const said = screens.join('\n');
    expect(said).toContain('bow-2: the arms go gently to where it begins');
    expect(said).toMatch(/bow-2 in 2 s/);
    expect(said).toMatch(/bow-2: played; \d+ events, late by/);
    // Marks of the take that plays are marks of the one that is recorded.
    expect(err).toMatch(
      /^bow-2: played; [^]*^recorded bow-3: 16\.0 s, \d+ rows, 2 marks,[^]*every follower is parked/m,
    );
  });

  it('stretches time for arms that are slower, and says by how much and for whom', () => {
    const { err, screens } = by('play');
    const stretch = Number(
      /time is stretched (\d+\.\d\d) times: the \w+ of robin's \w+ at \d+\.\d s asks for it/.exec(err)?.[1],
    );
    expect(stretch).toBeGreaterThan(1);
    expect(screens.some((screen) => /robin.*following/.test(screen))).toBe(true);
  });

  it('compares: joints that played agree, those in the hand do not', () => {
    const rms = (joint: string): number =>
      Number(new RegExp(`leader\\.${joint} +(\\d+\\.\\d+) deg rms`).exec(by('compare').out)?.[1]);
    for (const joint of ['base', 'shoulder', 'elbow', 'grip'])
      expect([joint, rms(joint)]).toEqual([joint, expect.closeTo(0, 0)]);
    expect(rms('nod') + rms('twist')).toBeGreaterThan(5);
  });

  it('exports both takes into one table', async () => {
    const file = await asyncBufferFromFile(files.path('bows.parquet'));
    const rows = await parquetReadObjects({ file });
    expect(new Set(rows.map(({ take }) => take))).toEqual(new Set(['bow-2', 'bow-3']));
    expect(rows.length).toBeGreaterThan(2 * 1_590);
    expect(Object.keys(rows[0] ?? {})).toContain('stork.grip.angle_deg');
  });

  it('lists them with their parents, none of them cut', () => {
    const { out } = by('list');
    expect(out).toMatch(/^bow-2 .*trim of bow$/m);
    expect(out).toMatch(/^bow-3 .*layer of bow-2$/m);
    expect(out).not.toContain('cut off');
  });
});
