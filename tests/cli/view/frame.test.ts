import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { CAUTIONS } from '../../../src/bridge/words.ts';
import { frame } from '../../../src/cli/view/frame.ts';
import { widthOf } from '../../../src/cli/view/layout.ts';
import type { Scene, Size } from '../../../src/cli/view/scene.ts';
import { shapesFor } from '../../../src/cli/view/shapes.ts';
import type { FollowerStatus } from '../../../src/drive/status.ts';
import { BLOCKS, LIMITS } from '../../../src/follower/reasons.ts';
import { STATES } from '../../../src/follower/states.ts';
import { ILLS } from '../../../src/leader/health.ts';
import { boardStatus, followerStatus, JOINTS, leaderStatus, liveStatus, pictureOf, scene } from './scenes.ts';

const shapes = shapesFor({ LANG: 'C.UTF-8' });
const WIDE: Size = { columns: 100, rows: 40 };
const USUAL: Size = { columns: 80, rows: 24 };
const SMALL: Size = { columns: 40, rows: 15 };

const picture = (changes: Partial<Scene>, size: Size): string => pictureOf(frame(scene(changes), size, shapes));
const withFollower = (changes: Partial<FollowerStatus>): Partial<Scene> => ({
  status: liveStatus({
    followers: [
      followerStatus(changes),
      followerStatus({ follower: 'heron' }),
      followerStatus({ follower: 'stork', ...changes }),
    ],
  }),
});

describe('The live view', () => {
  it('names rig, pace and contact on top and the keys at the bottom', () => {
    const lines = picture({}, WIDE).split('\n');
    expect(lines[0]).toMatch(/lantern-yard.*pace 100 %.*reading 5 ms old/);
    expect(lines.slice(-2).join(' ')).toMatch(
      /space STOP ALL.*h hold.*g go.*j join.*p park.*r rearm.*c clutch.*\? help/,
    );
    expect(lines).toHaveLength(40);
  });

  it('gives each joint a line where there is room, with its range, angle and target', () => {
    const shown = picture(
      withFollower({
        joints: [
          {
            joint: 'base',
            wanted_deg: 90,
            target_deg: 80,
            angle_deg: -12.34,
            range_deg: [-80, 80],
            load_share: null,
            warmth: null,
            limited_by: ['range', 'speed'],
          },
        ],
      }),
      WIDE,
    );
    expect(shown).toMatch(/base +-80\.0 ├─+●─+◇┤ \+80\.0 +-12\.3° +◇ \+80\.0° +end of range, full speed/);
  });

  it('puts joints side by side where there is less', () => {
    const shown = picture({}, USUAL);
    expect(shown).toMatch(/base +├─+◆─+┤ +\+0\.0° +shoulder +├─+◆─+┤ +\+5\.0°/);
    expect(shown.split('\n')).toHaveLength(24);
  });

  it('still shows every follower with its state on a small screen', () => {
    const shown = picture({}, SMALL);
    for (const follower of ['wren', 'heron', 'stork']) expect(shown).toMatch(new RegExp(`${follower} +► following`));
    expect(shown).toContain('space STOP ALL');
  });

  it('keeps the detail of a follower that is selected longest', () => {
    const shown = picture({ selected: [false, true, false] }, SMALL);
    expect(shown).toMatch(/\[2\] heron ► following\b.*\n +base +├/);
    for (const joint of JOINTS) expect(shown).toContain(joint);
    expect(shown).toMatch(/ 1 {2}wren +► following/);
    expect(shown).toContain('keys: heron');
  });

  it.each(STATES)('says %s in a word and in a shape', (state) => {
    expect(picture(withFollower({ state }), USUAL)).toContain(`wren  ${shapes.states[state]} ${state}`);
  });

  it.each(Object.keys(BLOCKS) as (keyof typeof BLOCKS)[])('says what a follower blocked by %s waits for', (block) => {
    expect(picture(withFollower({ state: 'holding', blocked_by: [block] }), USUAL)).toMatch(/wren.*\n {6}\w.*; /);
  });

  it.each((Object.keys(LIMITS) as (keyof typeof LIMITS)[]).filter((limit) => limit !== 'deadband'))(
    'says which joint is limited by %s, with or without lines for the joints',
    (limit) => {
      const joints = followerStatus().joints.map((joint, j) => (j === 1 ? { ...joint, limited_by: [limit] } : joint));
      expect(picture(withFollower({ joints }), USUAL)).toMatch(/wren .*following.*: shoulder/);
      expect(picture(withFollower({ joints }), WIDE)).toMatch(/shoulder .*° {2}[a-z]/);
    },
  );

  it('marks a limited joint where there is no room for words, and tells it beside the state', () => {
    const joints = followerStatus().joints.map((joint, j) =>
      j === 1 ? { ...joint, limited_by: ['speed' as const] } : joint,
    );
    const status = liveStatus({ followers: [followerStatus({ joints, lag_us: null })] });
    const shown = picture({ status }, { columns: 56, rows: 24 });
    expect(shown).toMatch(/wren ► following +full speed: shoulder/);
    expect(shown).toMatch(/shoulder ├.*° ▲$/m);
    expect(shown).toMatch(/base +├.*°$/m);
  });

  it('says which motor is near what it may give or take, with or without lines for the joints', () => {
    const joints = followerStatus().joints.map((joint, j) =>
      j === 1 ? { ...joint, load_share: 1.125, warmth: 0.79 } : { ...joint, load_share: 0.5, warmth: 0.1 },
    );
    expect(picture(withFollower({ joints }), USUAL)).toMatch(/wren .*load 112\.5 %: shoulder/);
    expect(picture(withFollower({ joints }), WIDE)).toMatch(/shoulder .*° {2}load 112\.5 %/);
    expect(picture(withFollower({ joints }), WIDE)).not.toContain('warmth');
  });

  it('says of each arm the highest load, and whose it is, and nothing where no motor is known', () => {
    const joints = followerStatus().joints.map((joint, j) => ({ ...joint, load_share: j === 2 ? 0.436 : 0.1 }));
    expect(picture(withFollower({ joints }), WIDE)).toMatch(/wren .*load 44 % elbow/);
    const unknown = joints.map((joint) => ({ ...joint, load_share: null }));
    expect(picture(withFollower({ joints: unknown }), WIDE)).not.toContain('load');
  });

  it('does not go on showing what limited an arm before it was held, but for a sick pot', () => {
    const joints = followerStatus().joints.map((joint) => ({ ...joint, limited_by: ['speed', 'sick'] as const }));
    const shown = picture(withFollower({ state: 'holding', blocked_by: ['held'], joints }), USUAL);
    expect(shown).not.toContain('full speed');
    expect(shown).toContain('pot is sick: base');
  });

  it('says which pot is sick, what is wrong with it and what to do', () => {
    const joints = leaderStatus().joints.map((joint, j) => (j === 2 ? { ...joint, health: 'rail' as const } : joint));
    const shown = picture({ status: liveStatus({ leader: leaderStatus({ joints }) }) }, USUAL);
    expect(shown).toContain('1 sick');
    expect(shown).toMatch(/▲ elbow: at the rail: .*check the plug/);
  });

  it('blames the port and not each pot of a leader that says nothing at all', () => {
    const joints = leaderStatus().joints.map((joint) => ({ ...joint, health: 'silent' as const, counts: null }));
    const leader = leaderStatus({ joints, stale: true, reading_age_us: null });
    const shown = picture({ status: liveStatus({ leader }) }, USUAL);
    expect(shown).toMatch(/no reading/);
    expect(shown).not.toContain('▲ base');
  });

  it('keeps telling why a port is closed and what to do, as long as it is', () => {
    const status = liveStatus({
      followers: [followerStatus({ state: 'absent' })],
      boards: [boardStatus({ followers: ['wren'], open: false, ready: false, fault: 'PORT_BUSY' })],
    });
    const shown = picture({ status }, USUAL);
    expect(shown).toContain('port closed');
    expect(shown.replaceAll(/\s+/g, ' ')).toContain(
      '/dev/ttyACM0 is held by another program; close it and the bridge reconnects',
    );
  });

  it('counts what a port has lost', () => {
    const followers = [followerStatus()];
    const boards = [boardStatus({ followers: ['wren'], lost: 3, garbled: 2, reboots: 1 })];
    expect(picture({ status: liveStatus({ followers, boards }) }, USUAL)).toContain('3 lost, 2 damaged, 1 restarts');
  });

  it('says that a dry run sends nothing', () => {
    expect(picture({ dry: true }, SMALL)).toContain('dry: nothing is sent');
  });
});

describe('An arm that waits for the go', () => {
  const waiting = withFollower({ state: 'waking', going: false, commands: 0, lag_us: null });

  it('is shown with the pose of its first pulse, on any screen', () => {
    expect(picture(waiting, WIDE)).toMatch(/shoulder +-80\.0 .* \+5\.0°/);
    expect(picture(waiting, USUAL)).toMatch(/shoulder +├.* +\+5\.0°/);
    const many = followerStatus({ state: 'waking', going: false });
    const crowd = { status: liveStatus({ followers: Array.from({ length: 4 }, () => many) }) };
    expect(picture(crowd, { columns: 80, rows: 20 })).toMatch(/\n {6}base \+0\.0, shoulder \+5\.0, elbow \+10\.0,/);
    expect(picture({ ...waiting, selected: [true, false, false] }, SMALL)).toMatch(/shoulder ├.*┤ +\+5\.0°/);
  });

  it('is shown with where that pose comes from', () => {
    expect(picture({ ...waiting, wakesAt: ['last', 'rest', 'rest'] }, WIDE)).toMatch(
      /wren.*\n {6}wakes where it was last told to be; .*let it go/,
    );
    expect(picture(waiting, WIDE)).toMatch(/wren.*\n {6}wakes at its rest pose; /);
  });

  it('is shown with the cautions, as far as the screen goes', () => {
    const wide = picture({ ...waiting, cautions: true }, { columns: 100, rows: 60 });
    for (const caution of CAUTIONS) expect(wide).toContain(caution);
    expect(picture({ ...waiting, cautions: true }, USUAL)).toContain('Keep out of reach');
    expect(picture({ ...waiting, cautions: true }, SMALL)).toContain('Keep out of reach');
  });
});

describe('Messages', () => {
  it('are shown with the time they came, newest last', () => {
    const messages = [
      { text: 'wren: the board answers', weight: 'note' as const, atUs: 400_000, times: 1 },
      { text: 'stork: unplugged; plug it in', weight: 'care' as const, atUs: 12_300_000, times: 3 },
    ];
    const shown = picture({ messages, nowUs: 12_300_000 }, USUAL);
    expect(shown).toMatch(/0\.4 s · wren: the board answers\n +12\.3 s ▲ stork: unplugged; plug it in \(3 times\)\n/);
  });

  it('grow old: a note after 15 s, what needs a hand after two minutes', () => {
    const messages = [
      { text: 'a note', weight: 'note' as const, atUs: 0, times: 1 },
      { text: 'a care', weight: 'care' as const, atUs: 0, times: 1 },
    ];
    expect(picture({ messages, nowUs: 14_000_000 }, USUAL)).toMatch(/a note[^]*a care/);
    expect(picture({ messages, nowUs: 16_000_000 }, USUAL)).not.toContain('a note');
    expect(picture({ messages, nowUs: 121_000_000 }, USUAL)).not.toContain('a care');
  });

  it('are wrapped, so that no remedy is cut off', () => {
    const text = 'stork: /dev/ttyACM1 is held by another program; close it and the bridge reconnects';
    const shown = picture({ messages: [{ text, weight: 'care', atUs: 0, times: 1 }] }, SMALL);
    expect(shown.replaceAll(/\s+/g, ' ')).toContain(text);
  });
});

describe('The help page', () => {
  it('explains every key and fits a usual terminal', () => {
    const shown = picture({ help: true }, USUAL);
    for (const sign of ['space', 'h', 'g', 'j', 'p', 'r', 'c', '-', '+', 'l', '1-3', '0', 'q', '?', 'Ctrl-C'])
      expect(shown).toMatch(new RegExp(`^${sign.replace(/[+?]/, '\\$&')} +\\w`, 'm'));
    expect(shown).toContain('● where a joint is told to be');
  });
});

describe('Whatever there is to show', () => {
  const joint = fc.record({
    joint: fc.constantFrom(...JOINTS),
    wanted_deg: fc.double({ min: -1e3, max: 1e3, noNaN: true }),
    target_deg: fc.double({ min: -1e3, max: 1e3, noNaN: true }),
    angle_deg: fc.double({ min: -1e3, max: 1e3, noNaN: true }),
    range_deg: fc.constant([-90, 90] as const),
    load_share: fc.option(fc.double({ min: 0, max: 3, noNaN: true })),
    warmth: fc.option(fc.double({ min: 0, max: 1, noNaN: true })),
    limited_by: fc.subarray(Object.keys(LIMITS) as (keyof typeof LIMITS)[]),
  });
  const follower = fc.record({
    follower: fc.constantFrom('wren', 'heron', 'a-follower-with-a-very-long-name'),
    state: fc.constantFrom(...STATES),
    blocked_by: fc.subarray(Object.keys(BLOCKS) as (keyof typeof BLOCKS)[]),
    going: fc.boolean(),
    clutched: fc.boolean(),
    moving: fc.boolean(),
    commands: fc.nat(),
    lag_us: fc.option(fc.nat()),
    busy_us: fc.option(fc.nat()),
    joints: fc.array(joint, { maxLength: 8 }),
  });
  const message = fc.record({
    text: fc.string({ unit: 'binary', maxLength: 120 }),
    weight: fc.constantFrom('note' as const, 'care' as const),
    atUs: fc.nat(1_000_000),
    times: fc.integer({ min: 1, max: 9 }),
  });
  const scenes = fc
    .record({
      followers: fc.array(follower, { maxLength: 12 }),
      ill: fc.constantFrom(...ILLS),
      messages: fc.array(message, { maxLength: 12 }),
      prompt: fc.option(fc.constant('All brake and hold.  p: park   Ctrl-C: leave')),
      cautions: fc.boolean(),
      help: fc.boolean(),
      select: fc.boolean(),
    })
    .map(({ followers, ill, select, ...rest }) => {
      const joints = leaderStatus().joints.map((each, j) => (j === 0 ? { ...each, health: ill } : each));
      const status = liveStatus({ followers, leader: leaderStatus({ joints }) });
      return scene({ ...rest, status, selected: followers.map((_, f) => !select || f === 0) });
    });

  it('the picture never leaves the screen and never holds a control character', () => {
    const sizes = fc.record({ columns: fc.integer({ min: 1, max: 140 }), rows: fc.integer({ min: 1, max: 70 }) });
    fc.assert(
      fc.property(scenes, sizes, (given, size) => {
        const lines = frame(given, size, shapes);
        expect(lines.length).toBeLessThanOrEqual(size.rows);
        for (const line of lines) {
          expect(widthOf(line)).toBeLessThanOrEqual(size.columns);
          expect(pictureOf([line])).not.toMatch(/\p{Cc}/u);
        }
      }),
    );
  });

  it('the question and the stop key are never pushed off a screen of 40 by 10', () => {
    fc.assert(
      fc.property(scenes, (given) => {
        const shown = pictureOf(frame({ ...given, help: false }, { columns: 40, rows: 10 }, shapes));
        expect(shown).toContain('space STOP ALL');
        expect(shown.includes('All brake and hold.')).toBe(given.prompt !== null);
      }),
    );
  });

  it('the same scene gives the same picture', () => {
    fc.assert(
      fc.property(scenes, (given) => {
        expect(frame(given, USUAL, shapes)).toEqual(frame(given, USUAL, shapes));
      }),
    );
  });
});
