import { mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { type WakeMemory, wakeMemory, wakeMemoryFile } from '../../src/bridge/wake-memory.ts';
import { virtualClock } from '../../src/clock/virtual.ts';
import { Rehearsal } from '../drive/rehearsal.ts';
import { DEG, followerJoint, followerSpec, planOf, S } from '../plans.ts';

const spec = followerSpec([followerJoint(0), followerJoint(1)]);
const other = followerSpec([followerJoint(0)], { name: 'stork' });
const plan = planOf([spec, other]);

describe('the wake memory', () => {
  let folder: string;
  let file: string;
  const faults: string[] = [];
  beforeEach(() => {
    folder = mkdtempSync(join(tmpdir(), 'wake-'));
    file = join(folder, 'deep', 'wake.json');
    faults.length = 0;
  });
  afterEach(() => rmSync(folder, { recursive: true, force: true }));

  const open = (at = file): WakeMemory => wakeMemory(at, (detail) => faults.push(detail));
  const degrees = (rad: Float64Array | null): number[] | null =>
    rad && [...rad].map((r) => Math.round((r / DEG) * 1e6) / 1e6);

  /** A run that ends where the leader left its arms, at 20 and -30 degrees, unless a key sends them home first. */
  const run = (memory: WakeMemory, parkFirst = false): void => {
    const clock = virtualClock();
    const on = new Rehearsal(plan);
    const watching = memory.watch(on.drive, clock);
    on.ready().plays(4 * S, () => [20, -30]);
    if (parkFirst) on.key('park').plays(5 * S);
    clock.runTo(on.nowUs);
    watching.stop();
  };
  const keep = (text: string): void => {
    mkdirSync(join(folder, 'deep'), { recursive: true });
    writeFileSync(file, text);
  };

  it('knows nothing at first', () => {
    expect(open().recall(spec)).toBeNull();
    expect(open().recall(followerSpec(spec.joints, { name: 'constructor' }))).toBeNull();
  });

  it('keeps where each arm was left, by name, from one run to the next', () => {
    run(open());
    expect(degrees(open().recall(spec))).toEqual([20, -30]);
    expect(degrees(open().recall(other))).toEqual([20]);
    expect(open().recall(followerSpec(spec.joints, { name: 'heron' }))).toBeNull();
    expect(faults).toEqual([]);
  });

  it('is not needed for an arm that was left parked', () => {
    run(open(), true);
    expect(open().recall(spec)).toBeNull();
    expect(readFileSync(file, 'utf8')).toContain('"parked": true');
  });

  it('writes while it runs, once a second at most, and only what is new', () => {
    const clock = virtualClock();
    const on = new Rehearsal(plan).ready().plays(S, () => [20, 20]);
    const watching = open().watch(on.drive, clock);
    const written = (): string | null => {
      try {
        return readFileSync(file, 'utf8');
      } catch {
        return null;
      }
    };
    clock.runTo(0.9 * S);
    expect(written()).toBeNull();
    clock.runTo(1.1 * S);
    expect(written()).not.toBeNull();
    rmSync(file);
    clock.runTo(5 * S);
    expect(written()).toBeNull();
    on.plays(0.1 * S, () => [21, 20]);
    clock.runTo(6.1 * S);
    expect(written()).not.toBeNull();
    watching.stop();
    expect(clock.nextUs()).toBe(Number.POSITIVE_INFINITY);
  });

  it('keeps what it knows of arms that this run does not tell anything', () => {
    run(open());
    const clock = virtualClock();
    const on = new Rehearsal(planOf([spec]));
    const watching = open().watch(on.drive, clock);
    on.ready().plays(4 * S, () => [0, 0]);
    watching.stop();
    expect(degrees(open().recall(other))).toEqual([20]);
    expect(open().recall(spec)).toBeNull();
  });

  it('writes nothing for a run in which nothing was told', () => {
    const watching = open().watch(new Rehearsal(plan).drive, virtualClock());
    watching.stop();
    expect(readdirSync(folder)).toEqual([]);
  });

  it('takes a file that was cut, or is none of its own, for no memory', () => {
    run(open());
    const whole = readFileSync(file, 'utf8');
    for (let end = 0; end < whole.length - 2; end += 7) {
      keep(whole.slice(0, end));
      expect(open().recall(spec)).toBeNull();
    }
    const odd = [
      '[]',
      'null',
      '7',
      '"wren"',
      '{"wren": null}',
      '{"wren": 3}',
      '{"wren": {}}',
      '{"wren": {"parked": 1, "angles_deg": {}}}',
      '{"wren": {"parked": false}}',
      '{"wren": {"parked": false, "angles_deg": null}}',
      '{"wren": {"parked": false, "angles_deg": 5}}',
    ];
    for (const text of odd) {
      keep(text);
      expect(open().recall(spec), text).toBeNull();
    }
  });

  it('takes joints that it does not know, or no longer understands, to be at rest', () => {
    keep('{"wren": {"parked": false, "angles_deg": {"joint0": 12, "joint1": "up", "gone": 3}}}');
    expect(degrees(open().recall(spec))).toEqual([12, 0]);
    keep('{"wren": {"parked": false, "angles_deg": {"joint0": 1e999}}}');
    expect(degrees(open().recall(spec))).toEqual([0, 0]);
  });

  it('says once that it cannot be written, and lets the run go on', () => {
    writeFileSync(join(folder, 'deep'), 'a file where a folder should be');
    const memory = open();
    run(memory);
    run(memory);
    expect(faults).toHaveLength(1);
    expect(memory.recall(spec)).toBeNull();
  });

  it('leaves no half-written file beside it', () => {
    run(open());
    expect(readdirSync(join(folder, 'deep'))).toEqual(['wake.json']);
  });

  it('lies in the folder for state, apart for each rig', () => {
    const at = (path: string, env: NodeJS.ProcessEnv): string => wakeMemoryFile(path, env);
    const one = at('/stage/yard.yaml', { XDG_STATE_HOME: '/state' });
    expect(one).toMatch(/^\/state\/eidograph\/wake-[0-9a-f]{16}\.json$/);
    expect(at('/stage/yard.yaml', { XDG_STATE_HOME: '/state' })).toBe(one);
    expect(at('/stage/other.yaml', { XDG_STATE_HOME: '/state' })).not.toBe(one);
    expect(at('/stage/yard.yaml', {})).toMatch(/\.local\/state\/eidograph\//);
  });
});
