import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { checkCommand, checkReport } from '../../src/cli/check.ts';
import { edited, fromMemory, RIG, STORK } from '../rig/memory.ts';
import type { Files } from '../rig/memory.ts';

const GOOD: Files = { 'rig.yaml': RIG, 'stork.yaml': STORK };
const BAD: Files = {
  ...GOOD,
  'stork.yaml': edited(STORK, ['rate_hz: 50', 'rate_hz: 0'], ['from: shoulder', 'from: sholder']),
};

let before: typeof process.exitCode;
beforeEach(() => {
  before = process.exitCode;
});
afterEach(() => {
  process.exitCode = before;
});

async function ran(files: Files, ...args: readonly string[]) {
  const out: string[] = [];
  const err: string[] = [];
  const command = checkCommand(
    { write: (text) => out.push(text) },
    { write: (text) => err.push(text) },
    fromMemory(files),
  );
  await command.parseAsync(args, { from: 'user' });
  return { out: out.join(''), err: err.join(''), status: process.exitCode };
}

describe('eidograph check', () => {
  it('says what a rig will do, on standard output, with status 0', async () => {
    expect(await ran(GOOD, 'rig.yaml')).toEqual({
      out: `rig.yaml: no mistakes
leader hand: lines on serial:/dev/hand?baud=115200; shoulder, elbow, pedal (enable)
follower stork: firmata on serial:/dev/stork?baud=57600; 6 bytes 50 times a second, 5 % of 57600 baud; stop category 2: brakes, then holds; waking, it waits for the go in the pose that is shown
  shoulder: -60 to 85 deg, rest -20 deg, at most 60 deg/s, stops within 7.5 deg
  elbow: -50 to 5 deg, rest 0 deg, at most 60 deg/s, stops within 7.5 deg
`,
      err: '',
      status: 0,
    });
  });

  it('says every mistake, one a line, on standard error, with status 2', async () => {
    expect(await ran(BAD, 'rig.yaml')).toEqual({
      out: '',
      err: `stork.yaml:4:10: rate_hz: rate_hz is 0; give at least 1: commands a second, in hertz
stork.yaml:9:11: joints[0].from: the leader has no joint sholder; did you mean shoulder?
`,
      status: 2,
    });
  });

  it('takes one profile alone', async () => {
    const { out, status } = await ran(GOOD, 'stork.yaml');
    expect(out.split('\n').map((line) => line.split(' ')[0])).toEqual(['stork.yaml:', 'follower', '', '', '']);
    expect(status).toBe(0);
  });

  it('prints one object with --json, whatever it finds', async () => {
    const good = await ran(GOOD, 'rig.yaml', '--json');
    const report = JSON.parse(good.out);
    expect(report).toMatchObject({ file: 'rig.yaml', mistakes: [], leader: { leader: 'hand' } });
    expect(report.followers).toHaveLength(1);
    expect(report.followers[0]).toMatchObject({
      follower: 'stork',
      command_bytes: 6,
      baud: 57_600,
      wake: 'ask',
      // 60^2 / (2 * 240) = 7.5 degrees.
      joints: [{ joint: 'shoulder', range_deg: [-60, 85], stopping_deg: 7.5 }, { joint: 'elbow' }],
    });
    // 6 bytes of 10 bits (8N1), 50 times a second.
    expect(report.followers[0].baud_share).toBeCloseTo(3000 / 57_600, 12);
    const bad = await ran(BAD, 'rig.yaml', '--json');
    expect([bad.status, bad.err]).toEqual([2, '']);
    expect(JSON.parse(bad.out)).toMatchObject({
      mistakes: [
        { code: 'RIG_VALUE_BOUNDS', file: 'stork.yaml', line: 4, column: 10, path: 'rate_hz' },
        { code: 'RIG_SOURCE_UNKNOWN', file: 'stork.yaml', line: 9, column: 11, path: 'joints[0].from' },
      ],
      followers: [],
    });
  });

  it('knows no baud rate where there is no serial line', () => {
    const files = { ...GOOD, 'stork.yaml': edited(STORK, ['serial:/dev/stork?baud=57600', 'tcp:there:7000']) };
    expect(checkReport('rig.yaml', fromMemory(files)).followers[0]).toMatchObject({ baud: null, baud_share: null });
  });

  it('reads from the disk by itself', () => {
    expect(checkReport('profiles/leaders/handstick.yaml')).toMatchObject({
      mistakes: [],
      leader: { leader: 'handstick', buttons: [{ button: 'pedal', does: 'hold' }] },
      followers: [],
    });
  });
});
