import { describe, expect, it } from 'vitest';
import { type Notices, notices } from '../../src/leader/notices.ts';
import { leaderSpec, MS, S } from '../plans.ts';

const STEP_US = 100 * MS;

/** Notices of three joints, pushed one reading every 0.1 s. */
function watched(): {
  notice: Notices;
  push(...counts: number[]): void;
  pushFor(forUs: number, counts: () => number[]): void;
} {
  const notice = notices(leaderSpec(3));
  let nowUs = 0;
  const push = (...counts: number[]): void => {
    nowUs += STEP_US;
    notice.push(nowUs, Float64Array.from(counts));
  };
  return {
    notice,
    push,
    pushFor(forUs, counts) {
      for (let us = 0; us < forUs; us += STEP_US) push(...counts());
    },
  };
}

describe('a frozen joint', () => {
  it('is one that has read exactly the same for ten seconds although another moved', () => {
    const { notice, pushFor } = watched();
    let i = 0;
    pushFor(9.9 * S, () => [500, 300 + 10 * (i++ % 10), 500]);
    expect([...notice.frozen]).toEqual([0, 0, 0]);
    pushFor(0.5 * S, () => [500, 300 + 10 * (i++ % 10), 500]);
    expect([...notice.frozen]).toEqual([1, 0, 1]);
  });

  it('is not one of a hand that lies still', () => {
    const { notice, pushFor } = watched();
    pushFor(30 * S, () => [500, 300, 500]);
    expect([...notice.frozen]).toEqual([0, 0, 0]);
  });

  it('is not one whose converter still flickers', () => {
    const { notice, pushFor } = watched();
    let i = 0;
    pushFor(30 * S, () => [500 + (i % 2), 300 + 10 * (i++ % 10), 500 + (i % 2)]);
    expect([...notice.frozen]).toEqual([0, 0, 0]);
  });

  it('thaws with the first other value', () => {
    const { notice, push, pushFor } = watched();
    let i = 0;
    pushFor(12 * S, () => [500, 300 + 10 * (i++ % 10), 500]);
    push(501, 300, 500);
    expect([...notice.frozen]).toEqual([0, 0, 1]);
  });
});

describe('the supply of the pots', () => {
  it('has sagged when all channels scale together, and is back when they do again', () => {
    const { notice, push } = watched();
    push(800, 400, 600);
    expect(notice.supplyRatio[0]).toBe(1);
    push(720, 360, 540);
    expect(notice.supplyRatio[0]).toBeCloseTo(0.9, 12);
    push(720, 360, 541);
    expect(notice.supplyRatio[0]).toBeCloseTo(0.9, 12);
    push(800, 400, 601);
    expect(notice.supplyRatio[0]).toBe(1);
  });

  it('has not when a hand turns joints by different factors', () => {
    const { notice, push } = watched();
    push(800, 400, 600);
    push(720, 380, 540);
    expect(notice.supplyRatio[0]).toBe(1);
  });

  it('is not judged by fewer than three joints', () => {
    const { notice, push } = watched();
    push(800, 400, Number.NaN);
    push(720, 360, Number.NaN);
    expect(notice.supplyRatio[0]).toBe(1);
  });

  it('is not judged by values that were not read', () => {
    const { notice, push } = watched();
    push(800, 400, 600);
    push(Number.NaN, Number.NaN, Number.NaN);
    push(720, 360, 540);
    expect(notice.supplyRatio[0]).toBeCloseTo(0.9, 12);
  });
});
