import { spawnSync } from 'node:child_process';
import { mkdirSync, mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { ROOT } from './planted.ts';

/** Packing and running start compilers, on a machine that may be busy. */
const LIMIT_MS = 120_000;

describe('the published package', { timeout: LIMIT_MS }, () => {
  // Inside the project, so that what the package depends on is found further up, as it would be once installed.
  let consumer: string;
  let files: readonly string[];

  beforeAll(() => {
    mkdirSync(join(ROOT, '.cache'), { recursive: true });
    consumer = mkdtempSync(join(ROOT, '.cache', 'consumer-'));
    const installed = join(consumer, 'node_modules', 'eidograph');
    mkdirSync(installed, { recursive: true });
    const packed = run('npm', ['pack', '--json', '--silent', '--pack-destination', consumer], ROOT);
    // What the build prints comes before the list.
    const [{ filename, files: listed }] = JSON.parse(packed.slice(packed.indexOf('[\n'))) as [
      { filename: string; files: { path: string }[] },
    ];
    files = listed.map(({ path }) => path);
    run('tar', ['-xzf', join(consumer, filename), '--strip-components', '1', '-C', installed], consumer);
  }, LIMIT_MS);
  afterAll(() => rmSync(consumer, { recursive: true }));

  const eidograph = (...args: string[]) =>
    run(process.execPath, ['node_modules/eidograph/dist/cli/main.js', ...args], consumer);

  it('holds the program, the profiles and the papers, and nothing else', () => {
    const papers = ['package.json', 'README.md', 'LICENSE'];
    const profiles = readdirSync(join(ROOT, 'profiles'), { recursive: true, encoding: 'utf8' })
      .filter((name) => name.endsWith('.yaml'))
      .map((name) => `profiles/${name}`);
    expect(profiles.length).toBeGreaterThan(0);
    const needed = [...papers, ...profiles, 'dist/index.js', 'dist/index.d.ts', 'dist/cli/main.js'];
    expect(needed.filter((path) => !files.includes(path))).toEqual([]);
    const strange = files.filter(
      (path) => !papers.includes(path) && !/^(dist\/.+\.(js|d\.ts)|profiles\/.+)$/.test(path),
    );
    expect(strange).toEqual([]);
  });

  it('runs as a command', () => {
    expect(eidograph('--help')).toContain('eidograph');
  });

  it('finds the rig of its demo where it was installed', () => {
    expect(eidograph('demo', '--for', '1s', '--json')).toContain('wren');
  });

  it('accepts every rig that it brings along', () => {
    const rigs = files.filter((path) => /^profiles\/(rigs|starters)\/.+\.yaml$/.test(path));
    expect(rigs.length).toBeGreaterThan(0);
    for (const rig of rigs) expect(eidograph('check', join('node_modules', 'eidograph', rig))).toContain('no mistakes');
  });

  it('is found and understood by a program that depends on it', () => {
    writeFileSync(join(consumer, 'package.json'), '{ "type": "module" }');
    writeFileSync(
      join(consumer, 'program.ts'),
      "import { virtualClock } from 'eidograph';\nconst instantUs: number = virtualClock(5).nowUs();\nconsole.log(instantUs);\n",
    );
    const tsc = join(ROOT, 'node_modules', 'typescript', 'bin', 'tsc');
    const options = ['--strict', '--module', 'nodenext', '--target', 'es2023', '--types', 'node', '--ignoreConfig'];
    run(process.execPath, [tsc, ...options, 'program.ts'], consumer);
    expect(run(process.execPath, ['program.js'], consumer)).toBe('5\n');
  });
});

function run(program: string, args: readonly string[], cwd: string): string {
  const { status, stdout, stderr } = spawnSync(program, args, {
    cwd,
    encoding: 'utf8',
    stdio: ['ignore', 'pipe', 'pipe'],
  });
  if (status !== 0) throw new Error(`${program} ${args.join(' ')} ended with ${status}:\n${stdout}${stderr}`);
  return stdout;
}
