import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { loadProfile, loadRig } from '../../src/rig/load.ts';
import type { LoadedRig } from '../../src/rig/load.ts';
import { mistakeLine } from '../../src/rig/mistake.ts';
import { profileFiles } from './profile-files.ts';

function loaded(file: string): LoadedRig {
  const rig = loadRig(join('profiles', file));
  if ('mistakes' in rig) throw new Error(rig.mistakes.map(mistakeLine).join('\n'));
  return rig;
}

describe('the profiles that come with the program', () => {
  it.each(profileFiles())('%s is without mistakes', (file) => {
    const result = loadProfile(join('profiles', file));
    expect('mistakes' in result ? result.mistakes.map(mistakeLine) : []).toEqual([]);
  });

  it('hold a starter for each wire, and one for a board with both ends', () => {
    const boards = profileFiles()
      .filter((file) => file.startsWith('starters'))
      .map((file) => [file, loaded(file).rig.boards.map(({ wire }) => wire.name)]);
    expect(Object.fromEntries(boards)).toEqual({
      [join('starters', 'firmata-one-board.yaml')]: ['firmata'],
      [join('starters', 'firmata-two-boards.yaml')]: ['firmata', 'firmata'],
      [join('starters', 'frames-two-boards.yaml')]: ['frames', 'frames'],
      [join('starters', 'lines-two-boards.yaml')]: ['lines', 'lines'],
    });
  });

  it('start slowly and ask before they move, and mark what must be changed', () => {
    for (const file of profileFiles().filter((name) => name.startsWith('starters'))) {
      const { plan } = loaded(file).rig;
      expect(plan.pace, file).toBe(0.25);
      expect(
        plan.followers.map(({ wake }) => wake),
        file,
      ).toEqual(['ask']);
      const ports = readFileSync(join('profiles', file), 'utf8')
        .split('\n')
        .filter((line) => /^\s+port:/.test(line));
      for (const line of ports) expect(line, file).toContain('# CHANGE');
    }
  });
});

describe('the Lantern Yard', () => {
  const { rig, profiles } = loaded('rigs/lantern-yard.yaml');

  it('is one hand with three arms of growing reach, on a wire each', () => {
    expect(profiles.leader.leader).toBe('handstick');
    // Sum of the links, in millimetres: 20+70+60+20+10, 40+280+200+50+30, 100+900+700+120+80.
    const reach = profiles.followers.map(({ follower, arm }) => [
      follower,
      (arm?.links ?? []).reduce((sum, { to_mm }) => sum + Math.hypot(...to_mm), 0),
    ]);
    expect(reach).toEqual([
      ['wren', 180],
      ['heron', 600],
      ['stork', 1900],
    ]);
    expect(rig.boards.map(({ wire }) => wire.name)).toEqual(['frames', 'lines', 'firmata', 'frames']);
  });

  it('has arms whose rest pose is what the resting hand asks for, so that they join at once', () => {
    for (const { name, joints } of rig.plan.followers) {
      for (const joint of joints) {
        // Within 1 degree, where joining counts as met.
        expect(Math.abs(joint.offsetRad - joint.restRad), `${joint.name} of ${name}`).toBeLessThan(Math.PI / 180);
      }
    }
  });

  it('hangs the stork over people’s heads, and caps it at 250 mm/s', () => {
    const whole = rig.plan.followers[2]?.whole;
    expect(whole).toMatchObject({ endSpeedMS: 0.25, keepOut: [{ kind: 'below', zM: 1.32 }] });
    // Turned about x by half a turn: what is up in its profile hangs down.
    expect(whole?.arm.base.tiltRad).toEqual([Math.PI, 0]);
  });

  it('lets the heron’s tip follow the leader’s, half as far again, and its twist and grip copy joints', () => {
    const heron = rig.plan.followers[1];
    // 600 mm of reach against 400.
    expect(heron?.whole?.tip?.scale).toBeCloseTo(1.5, 12);
    expect(heron?.whole?.tip?.reaching.map((j) => heron.joints[j]?.name)).toEqual(['base', 'shoulder', 'elbow', 'nod']);
  });
});
