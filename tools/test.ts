/**
 * Everything the project promises about itself, in one command: the static checks, then the tests of the rooms, then
 * the boards, then the smoke test alone and last. The last line printed is `N passed, N failed`.
 */
import { spawn } from 'node:child_process';
import { existsSync, mkdirSync, readdirSync, readFileSync, rmSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { lawTests } from './law-tests.ts';
import { provide, type SystemPackage } from './system-packages.ts';
import { closingLine, type RunRecord, sum, type Tally, tallyOfCheck, tallyOfRun } from './tally.ts';

const ROOT = resolve(import.meta.dirname, '..');
const RECORDS = join(ROOT, '.cache', 'test');
const RECORDER = './tools/run-record.ts';

/** A step that hangs is ended: a test command must always come to its last line. */
const STEP_LIMIT_MS = 20 * 60_000;

/**
 * The rooms run on this seed, so that a red run is red again on every machine. Their laws then run once more on a
 * fresh printed seed (or on EIDOGRAPH_SEED, to replay one), so that every run also looks where none has looked before;
 * that second pass counts as one check, because it is the same tests again.
 */
const FIXED_SEED = '1821';

const SYSTEM_PACKAGES: readonly SystemPackage[] = [
  { name: 'socat', program: 'socat', neededBy: 'tests of real serial ports (pseudo-terminals)' },
];

/** npm scripts of the same name, in order. */
const CHECKS = ['types', 'lint', 'format:check', 'boundaries', 'unused', 'packaging'];

const tallies: Tally[] = [];

async function main(): Promise<void> {
  rmSync(RECORDS, { recursive: true, force: true });
  mkdirSync(RECORDS, { recursive: true });
  const missing = provide(SYSTEM_PACKAGES);
  sayMissing(missing);
  for (const name of CHECKS) await step(name, () => check(name));
  await step('rooms', () => vitest('rooms', ['--project', 'rooms'], { EIDOGRAPH_SEED: FIXED_SEED }));
  await step('laws on a fresh seed', freshLaws);
  for (const project of ['boards', 'smoke']) {
    if (hasTests(project)) {
      await step(project, () => vitest(project, ['--project', project], { EIDOGRAPH_SEED: FIXED_SEED }));
    }
  }
  const total = sum(tallies);
  for (const name of total.skipped) console.log(`skipped: ${name}`);
  for (const name of total.failed) console.log(`FAILED: ${name}`);
  sayMissing(missing);
  console.log(closingLine(total));
  process.exitCode = total.failed.length === 0 ? 0 : 1;
}

async function step(name: string, run: () => Promise<Tally>): Promise<void> {
  console.log(`\n== ${name}`);
  const startMs = performance.now();
  const tally = await run();
  tallies.push(tally);
  const seconds = ((performance.now() - startMs) / 1000).toFixed(1);
  console.log(`== ${name}: ${tally.failed.length === 0 ? 'ok' : 'FAILED'}, ${seconds} s`);
}

async function check(name: string): Promise<Tally> {
  return tallyOfCheck(name, await ended('npm', ['run', '--silent', name], {}));
}

async function vitest(name: string, args: readonly string[], env: NodeJS.ProcessEnv): Promise<Tally> {
  const recordPath = join(RECORDS, `${name.replaceAll(' ', '-')}.json`);
  const exitCode = await ended(
    process.execPath,
    [join('node_modules', 'vitest', 'vitest.mjs'), 'run', ...args, '--reporter=default', `--reporter=${RECORDER}`],
    { ...env, EIDOGRAPH_RECORD: recordPath },
  );
  const record = existsSync(recordPath) ? (JSON.parse(readFileSync(recordPath, 'utf8')) as RunRecord) : null;
  return tallyOfRun(name, record, exitCode);
}

async function freshLaws(): Promise<Tally> {
  const name = 'laws on a fresh seed';
  const files = lawTests(join(ROOT, 'tests')).map((path) => `tests/${path}`);
  const { failed } = await vitest(name, ['--project', 'rooms', ...files], {});
  return failed.length === 0
    ? tallyOfCheck(name, 0)
    : { passed: 0, failed: [`${name}: ${failed.join('; ')}`], skipped: [] };
}

function hasTests(project: string): boolean {
  const folder = join(ROOT, 'tests', project);
  return existsSync(folder) && readdirSync(folder, { recursive: true, encoding: 'utf8' }).some(isTest);
}

function isTest(name: string): boolean {
  return name.endsWith('.test.ts');
}

/** Runs a program with its output shown as it comes; resolves with its exit status, 1 when it was ended by a signal. */
function ended(program: string, args: readonly string[], env: NodeJS.ProcessEnv): Promise<number> {
  return new Promise((done) => {
    const child = spawn(program, args, {
      cwd: ROOT,
      env: { ...process.env, ...env },
      stdio: ['ignore', 'inherit', 'inherit'],
      timeout: STEP_LIMIT_MS,
      killSignal: 'SIGKILL',
      // npm is a script on Windows, which only a shell starts.
      shell: program === 'npm' && process.platform === 'win32',
    });
    child.once('error', (error) => {
      console.log(String(error));
      done(1);
    });
    child.once('close', (code) => done(code ?? 1));
  });
}

function sayMissing(missing: readonly SystemPackage[]): void {
  for (const entry of missing) {
    console.log(`missing: ${entry.name}, for ${entry.neededBy}; install it with: sudo apt-get install ${entry.name}`);
  }
}

await main();
