import { readFileSync } from 'node:fs';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { runProgram } from '../../src/cli/program.ts';

let printed = { out: '', err: '' };

beforeEach(() => {
  printed = { out: '', err: '' };
  vi.spyOn(process.stdout, 'write').mockImplementation((text) => {
    printed.out += String(text);
    return true;
  });
  vi.spyOn(process.stderr, 'write').mockImplementation((text) => {
    printed.err += String(text);
    return true;
  });
});

afterEach(() => {
  vi.restoreAllMocks();
  process.exitCode = undefined;
});

const COMMANDS = ['demo', 'run', 'ports', 'check', 'trace', 'schema'];

describe('The command line', () => {
  it('lists its commands', async () => {
    expect(await runProgram(['--help'])).toBe(0);
    for (const command of COMMANDS) expect(printed.out).toMatch(new RegExp(`^  ${command} `, 'm'));
    expect(printed.err).toBe('');
  });

  it('says its version', async () => {
    const { version } = JSON.parse(readFileSync('package.json', 'utf8')) as { version: string };
    expect(await runProgram(['--version'])).toBe(0);
    expect(printed.out).toBe(`${version}\n`);
  });

  it.each(COMMANDS)('explains %s', async (command) => {
    expect(await runProgram([command, '--help'])).toBe(0);
    expect(printed.out).toContain(`eidograph ${command}`);
  });

  it('says the cautions where arms move', async () => {
    await runProgram(['run', '--help']);
    for (const word of ['crush', 'no emergency stop', 'ISO 13850', 'IEC 60204-1', 'pace 25 %', 'Local rules'])
      expect(printed.out).toContain(word);
    await runProgram(['demo', '--help']);
    expect(printed.out).toContain('Nothing real moves');
  });

  it.each([
    ['no command', [], 'Usage: eidograph'],
    ['an unknown command', ['rnu'], 'Did you mean run?'],
    ['an unknown option', ['run', 'rig.yaml', '--pcae', '25%'], '--pcae'],
    ['a missing argument', ['trace'], "missing required argument 'rig'"],
    ['a missing argument of a subcommand', ['take', 'show'], "missing required argument 'name'"],
    ['a missing option of a subcommand', ['take', 'trim', 'bow'], "required option '--as <name>' not specified"],
    ['a mistyped subcommand', ['take', 'shwo'], 'Did you mean show?'],
    ['a value that cannot be read', ['run', 'rig.yaml', '--pace', 'fast'], 'A pace is a percentage from 1 to 100'],
    ['a time without a unit', ['demo', '--for', '10'], '500ms, 10s'],
    ['a log level that is none', ['demo', '--log', 'loud'], 'A log level is one of'],
  ])('ends with status 2 on %s, said on standard error only', async (_, args, expected) => {
    expect(await runProgram(args)).toBe(2);
    expect(printed.err).toContain(expected);
    expect(printed.out).toBe('');
  });

  it('passes on the status that a command ends with', async () => {
    expect(await runProgram(['schema', 'rig'])).toBe(0);
    expect(await runProgram(['check', 'nowhere.yaml'])).toBe(2);
    expect(await runProgram(['trace', 'nowhere.yaml'])).toBe(2);
  });
});
