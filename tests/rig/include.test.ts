import { describe, expect, it } from 'vitest';
import { loadProfile, loadRig } from '../../src/rig/load.ts';
import { edited, fromMemory, linesIn, mistakesIn, RIG, rigIn, STORK } from './memory.ts';

const RIGS = edited(RIG, ['  - stork.yaml', '  - ../followers/stork.yaml']);
const WITH_TWIN = (keys: string): string =>
  edited(RIGS, [
    '  - ../followers/stork.yaml',
    `  - ../followers/stork.yaml\n  - { like: ../followers/stork.yaml, ${keys} }`,
  ]);

describe('profiles in files of their own', () => {
  it('are found relative to the file that names them', () => {
    const files = { 'profiles/rigs/yard.yaml': RIGS, 'profiles/followers/stork.yaml': STORK };
    expect(rigIn(files, 'profiles/rigs/yard.yaml').rig.plan.followers[0]?.name).toBe('stork');
  });

  it('are named in mistakes as seen from where the program was started', () => {
    const files = {
      'profiles/rigs/yard.yaml': RIGS,
      'profiles/followers/stork.yaml': edited(STORK, ['rate_hz: 50', 'rate_hz: 0']),
    };
    expect(linesIn(files, 'profiles/rigs/yard.yaml')).toEqual([
      'profiles/followers/stork.yaml:4:10: rate_hz: rate_hz is 0; give at least 1: commands a second, in hertz',
    ]);
  });

  it('are told wrong once, however often they are used', () => {
    const files = {
      'r/yard.yaml': WITH_TWIN('follower: twin, port: "tcp:there:7000"'),
      'followers/stork.yaml': edited(STORK, ['rate_hz: 50', 'rate_hz: 0']),
    };
    expect(mistakesIn(files, 'r/yard.yaml')).toHaveLength(1);
  });

  it('are told wrong sorted by file and place, over all files', () => {
    const files = {
      'r/yard.yaml': edited(RIGS, ['rig: yard', 'rig: Yard'], ['despike: 3', 'despike: 2']),
      'followers/stork.yaml': edited(STORK, ['rate_hz: 50', 'rate_hz: 0'], ['rest_deg: -20', 'rest_deg: -90']),
    };
    expect(mistakesIn(files, 'r/yard.yaml').map(({ file, line }) => [file, line])).toEqual([
      ['followers/stork.yaml', 4],
      ['followers/stork.yaml', 13],
      ['r/yard.yaml', 1],
      ['r/yard.yaml', 12],
    ]);
  });
});

describe('a file of another kind', () => {
  it.each([
    ['a follower', STORK, 'this is a follower file'],
    ['a list', '- 1\n', 'this is neither a rig nor a profile'],
  ])('is refused where a rig is asked for: %s', (_what, text, wrong) => {
    const loaded = loadRig('a.yaml', fromMemory({ 'a.yaml': text }));
    expect(loaded).toMatchObject({ mistakes: [{ code: 'RIG_KIND', file: 'a.yaml', wrong }] });
  });
});

describe('like:', () => {
  it('lays keys over another profile: maps key by key, lists as a whole', () => {
    const joints =
      'joints: [{ name: neck, from: elbow, range_deg: [-9, 9], speed_deg_s: 5, accel_deg_s2: 9, servo: { channel: 3, points: [[-9, 1000], [9, 2000]] } }]';
    const keys = `follower: twin, port: "tcp:there:7000", join: { meet: wait }, ${joints}, servos: [], poses: null`;
    const files = {
      'r/yard.yaml': WITH_TWIN(keys),
      'followers/stork.yaml': edited(STORK, ['speed: 0.25', 'speed: 0.1']),
    };
    const [stork, twin] = rigIn(files, 'r/yard.yaml').rig.plan.followers;
    expect(stork).toMatchObject({ name: 'stork', joinShare: 0.1, joinMeet: 'move' });
    expect(twin).toMatchObject({ name: 'twin', joinShare: 0.1, joinMeet: 'wait', joints: [{ name: 'neck' }] });
    expect([twin?.servos.length, twin?.poses.size]).toEqual([1, 0]);
  });

  it('builds on a profile that builds on another, and on a leader', () => {
    const files = {
      'rig.yaml': 'rig: yard\nleader: { like: hand.yaml, port: "sim:hand" }\nfollowers: [small.yaml]\n',
      'hand.yaml':
        'leader: hand\nport: sim:hand?seed=2\nwire: frames\njoints: [{ name: shoulder, channel: 0, points: [[0, -90], [900, 90]] }, { name: elbow, channel: 1, points: [[0, -90], [900, 90]] }]\n',
      'small.yaml': 'like: middle.yaml\nfollower: small\n',
      'middle.yaml': 'like: stork.yaml\nrate_hz: 25\n',
      'stork.yaml': STORK,
    };
    const { rig } = rigIn(files);
    expect(rig.plan.followers[0]).toMatchObject({ name: 'small', periodUs: 40_000 });
    expect(rig.boards[0]?.address.text).toBe('sim:hand');
  });

  it('places a mistake in the file that made it', () => {
    const files = {
      'r/yard.yaml': WITH_TWIN('follower: twin, port: "tcp:there:7000", rate_hz: fast'),
      'followers/stork.yaml': STORK,
    };
    expect(linesIn(files, 'r/yard.yaml')).toEqual([
      'r/yard.yaml:18:87: followers[1].rate_hz: rate_hz is the text "fast"; give a number: commands a second, in hertz',
    ]);
  });

  it('lets a profile be checked alone that builds on another', () => {
    const files = fromMemory({ 'small.yaml': 'like: stork.yaml\nfollower: small\n', 'stork.yaml': STORK });
    expect(loadProfile('small.yaml', files)).toMatchObject({
      kind: 'follower',
      follower: { follower: 'small', rate_hz: 50 },
    });
  });

  it('refuses a chain past sixteen files', () => {
    const chain = Object.fromEntries(
      Array.from({ length: 40 }, (_, i) => [`f${i}.yaml`, `like: f${i + 1}.yaml\nfollower: f${i}\n`]),
    );
    expect(mistakesIn({ ...chain, 'f40.yaml': STORK }, 'f0.yaml').map(({ code }) => code)).toEqual([
      'RIG_INCLUDE_CYCLE',
    ]);
  });
});
