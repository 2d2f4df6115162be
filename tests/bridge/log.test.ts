import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { logDestination, openLog } from '../../src/bridge/log.ts';
import { virtualClock } from '../../src/clock/virtual.ts';

interface LogLine {
  readonly level: number;
  readonly msg: string;
  readonly left_out?: number;
}

function logged(level: 'warn' | 'info' = 'info') {
  const lines: LogLine[] = [];
  const clock = virtualClock();
  const to = { write: (line: string) => void lines.push(JSON.parse(line) as LogLine) };
  return { lines, clock, log: openLog({ level, clock, to }) };
}

describe('The log', () => {
  it('writes one JSON object a line, with what belongs to it', () => {
    const { lines, log } = logged();
    log.info({ port: 'serial:COM3' }, 'opened');
    expect(lines).toEqual([expect.objectContaining({ port: 'serial:COM3', msg: 'opened', level: 30 })]);
  });

  it('keeps to its level', () => {
    const { lines, log } = logged('warn');
    log.info('not this');
    log.warn('this');
    expect(lines.map(({ msg }) => msg)).toEqual(['this']);
  });

  it('cuts a burst at twenty lines a second and says how many it left out', () => {
    const { lines, log, clock } = logged();
    for (let i = 0; i < 50; i++) log.info(`line ${i}`);
    expect(lines.map(({ msg }) => msg)).toEqual(Array.from({ length: 20 }, (_, i) => `line ${i}`));
    clock.runTo(1_000_000);
    log.info('later');
    expect(lines.slice(20)).toEqual([
      expect.objectContaining({ left_out: 30 }),
      expect.objectContaining({ msg: 'later' }),
    ]);
  });

  it('never leaves out the worst', () => {
    const { lines, log } = logged();
    for (let i = 0; i < 50; i++) log.info(`line ${i}`);
    log.fatal('the end');
    expect(lines.at(-1)?.msg).toBe('the end');
  });

  it('in a file is written before the call returns', () => {
    const folder = mkdtempSync(join(tmpdir(), 'eidograph-log-'));
    const file = join(folder, 'run.log');
    try {
      const log = openLog({ level: 'info', clock: virtualClock(), to: logDestination(file) });
      log.info('written');
      expect(readFileSync(file, 'utf8')).toContain('"msg":"written"');
    } finally {
      rmSync(folder, { recursive: true });
    }
  });
});
