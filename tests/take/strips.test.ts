import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { STRIP_COLUMNS, type StripSheet } from '../../src/draw/strip-sheet.ts';
import { LIMITS } from '../../src/follower/reasons.ts';
import type { Take } from '../../src/take/reader.ts';
import { EVENT_CODES, type Row, STATE_CODES } from '../../src/take/row.ts';
import { strips } from '../../src/take/strips.ts';
import { fileWriter, headerOf, opened, takesFolderForTests, TWO_ARMS } from './studio.ts';

const folder = takesFolderForTests();
const DEG = Math.PI / 180;

/** A take of 12 s, so that a column is 10 ms. */
async function written(
  name: string,
  fill: (row: Row, i: number) => void,
  rows = 1200,
  everyUs = 10_000,
): Promise<Take> {
  const writer = fileWriter(folder, name, headerOf(TWO_ARMS));
  for (let i = 0; i <= rows; i++) {
    const { row } = writer;
    Object.assign(row, { tUs: i * everyUs, event: EVENT_CODES.reading, name: '' });
    row.poseRad.fill(0);
    for (const arm of row.followers) {
      Object.assign(arm, { commanded: 1, state: STATE_CODES.following });
      arm.limits.fill(0);
      arm.targetRad.fill(0);
      arm.angleRad.fill(0);
    }
    fill(row, i);
    writer.append();
  }
  await writer.end();
  return opened(join(folder, `${name}.arrows`));
}

function drawn(take: Take, only: readonly string[] = []): StripSheet {
  const work = strips(take, only);
  let step = work.next();
  while (step.done !== true) step = work.next();
  return step.value;
}

describe('The strips of a take', () => {
  it('are one for each joint of the leader and of each follower, or of those that are asked for', async () => {
    const take = await written('joints', () => {}, 10);
    expect(drawn(take).groups.map(({ title, strips: each }) => [title, each.map((strip) => strip.title)])).toEqual([
      ['leader handstick', ['base', 'elbow']],
      ['wren', ['base', 'elbow']],
      ['stork', ['base', 'elbow']],
    ]);
    expect(drawn(take, ['stork']).groups.map(({ title }) => title)).toEqual(['leader handstick', 'stork']);
  });

  it('keep the extremes of every column, however many rows fall into it', async () => {
    // 100 rows a column; in each, one row is far up and one far down.
    const take = await written(
      'extremes',
      ({ followers }, i) => {
        const angle = i % 100 === 40 ? 9 : i % 100 === 60 ? -9 : 0;
        followers[0]?.angleRad.fill(angle * DEG);
      },
      100 * STRIP_COLUMNS,
      1_000,
    );
    const angle = drawn(take).groups[1]?.strips[0]?.angle;
    expect(angle?.most).toHaveLength(STRIP_COLUMNS);
    for (let column = 0; column < STRIP_COLUMNS; column++) {
      expect(angle?.most[column]).toBeCloseTo(9, 9);
      expect(angle?.least[column]).toBeCloseTo(-9, 9);
    }
  });

  it('shade what held a joint back from the command that said so to the one that says otherwise', async () => {
    const take = await written('limited', ({ followers }, i) => {
      const [wren] = followers;
      if (wren === undefined) return;
      wren.limits[0] = i >= 100 && i < 200 ? LIMITS.speed | LIMITS.deadband : i >= 300 && i < 400 ? LIMITS.range : 0;
      if (i >= 600 && i < 700) wren.limits[1] = LIMITS.load | LIMITS.keep_out;
    });
    const [base, elbow] = drawn(take).groups[1]?.strips ?? [];
    expect(base?.shaded).toEqual([
      { from: 300, to: 401, shade: 'clipped', word: 'range' },
      { from: 100, to: 201, shade: 'limited', word: 'speed' },
    ]);
    expect(elbow?.shaded).toEqual([{ from: 600, to: 701, shade: 'limited', word: 'keep-out, load' }]);
  });

  it('shade where a follower does not follow, and name its states', async () => {
    const take = await written('states', ({ followers }, i) => {
      const state = i < 240 ? 'waking' : i < 480 ? 'joining' : i < 720 ? 'following' : 'holding';
      for (const arm of followers) arm.state = STATE_CODES[state];
    });
    const wren = drawn(take).groups[1];
    expect(wren?.lane).toEqual([
      { from: 0, to: 240, word: 'waking' },
      { from: 240, to: 480, word: 'joining' },
      { from: 480, to: 720, word: 'following' },
      { from: 720, to: 1200, word: 'holding' },
    ]);
    expect(wren?.strips[0]?.shaded).toEqual([
      { from: 0, to: 241, shade: 'held', word: 'not following' },
      { from: 720, to: 1200, shade: 'held', word: 'not following' },
    ]);
  });

  it('shade where no readings came, to the very end', async () => {
    const take = await written('dropouts', (row, i) => {
      if ((i >= 300 && i < 320) || i >= 1100) row.event = EVENT_CODES.tick;
    });
    expect(drawn(take).groups[0]?.strips[1]?.shaded).toEqual([
      { from: 299, to: 321, shade: 'dropout', word: 'no readings' },
      { from: 1099, to: 1200, shade: 'dropout', word: 'no readings' },
    ]);
  });

  it('have the marks of the take, and say how it was made', async () => {
    const take = await written('marked', (row, i) => {
      if (i === 500) Object.assign(row, { event: EVENT_CODES.key, name: 'bow' });
    });
    const { marks, subtitle } = drawn(take);
    expect(marks).toEqual([{ name: 'bow', atS: 5 }]);
    expect(subtitle).toBe('recorded from rehearsal, 12.00 s, 1201 rows; degrees');
  });
});
