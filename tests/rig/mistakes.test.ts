import { describe, expect, it } from 'vitest';
import { loadProfile } from '../../src/rig/load.ts';
import { mistakeLine } from '../../src/rig/mistake.ts';
import { MISTAKE_CODES } from '../../src/rig/mistake-codes.ts';
import { ARM_CASES } from './cases/arm.ts';
import { BOARD_CASES } from './cases/board.ts';
import type { MistakeCase } from './cases/case.ts';
import { CONTRADICTION_CASES } from './cases/contradiction.ts';
import { READING_CASES } from './cases/reading.ts';
import { SHAPE_CASES } from './cases/shape.ts';
import { WHOLE_ARM_CASES } from './cases/whole-arm.ts';
import { edited, fromMemory, mistakesIn, RIG, STORK } from './memory.ts';
import type { Files } from './memory.ts';

const GROUPS: Readonly<Record<string, readonly MistakeCase[]>> = {
  'files that cannot be read': READING_CASES,
  'keys and values that are malformed': SHAPE_CASES,
  'profiles that contradict themselves': CONTRADICTION_CASES,
  'boards that cannot do what is asked': BOARD_CASES,
  'arms that cannot be': ARM_CASES,
  'what an arm is asked that it cannot keep': WHOLE_ARM_CASES,
};

/** What other files of the cases name. */
const BESIDE: Files = {
  'other.yaml': 'leader: hand\nport: sim:hand\nwire: frames\njoints: []\n',
  'circle.yaml': 'like: round.yaml\nfollower: circle\n',
  'round.yaml': 'like: circle.yaml\n',
};

function said({ rig = [], stork = [], twin, files, file = 'rig.yaml', fault }: MistakeCase): readonly string[] {
  const changed = edited(STORK, ...stork);
  const second =
    twin === true
      ? edited(changed, ['stork\nport', 'twin\nport'], ['channel: 5', 'channel: 15'], ['channel: 7', 'channel: 17'])
      : '';
  const here = files ?? { ...BESIDE, 'rig.yaml': edited(RIG, ...rig), 'stork.yaml': changed, 'twin.yaml': second };
  const loaded = loadProfile(file, fault === undefined ? fromMemory(here) : () => fault);
  return 'mistakes' in loaded ? loaded.mistakes.map((mistake) => `${mistake.code} ${mistakeLine(mistake)}`) : [];
}

describe('a rig without mistakes', () => {
  it('is told none', () => {
    expect(mistakesIn({ 'rig.yaml': RIG, 'stork.yaml': STORK })).toEqual([]);
  });
});

describe.each(Object.entries(GROUPS))('%s', (_group, cases) => {
  it.each(cases)('$title', (one) => {
    expect(said(one)).toEqual(one.says);
  });
});

describe('the table of codes', () => {
  it('lists exactly the codes that the cases above provoke', () => {
    const provoked = Object.values(GROUPS).flatMap((cases) => cases.flatMap(said).map((line) => line.split(' ')[0]));
    expect(new Set(provoked)).toEqual(new Set(Object.keys(MISTAKE_CODES)));
  });

  it('says in one line each what was found and what mends it', () => {
    for (const [code, { means, remedy }] of Object.entries(MISTAKE_CODES)) {
      expect(code).toMatch(/^RIG_[A-Z]+(_[A-Z]+)*$/);
      for (const text of [means, remedy]) expect(text).toMatch(/^[^\n|]{8,}[^.\s]$/);
    }
  });
});
