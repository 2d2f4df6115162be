import { describe, expect, it } from 'vitest';
import { outlet, type Send } from '../../src/cli/outlet.ts';
import { virtualClock } from '../../src/clock/virtual.ts';

/** A reader that takes what is written when the test says so. */
function reader() {
  const clock = virtualClock();
  const got: string[] = [];
  const faults: string[] = [];
  let answer: ((fault: string | null, bytes?: number) => void) | null = null;
  const send: Send = (bytes, done) => {
    answer = (fault, count = bytes.length) => {
      answer = null;
      if (fault === null) got.push(new TextDecoder().decode(bytes.subarray(0, count)));
      done(fault === null ? null : Object.assign(new Error(fault), { code: fault }), fault === null ? count : 0);
    };
  };
  const out = outlet(clock, send, (fault) => faults.push(fault.code ?? ''));
  const takes = (fault: string | null = null, bytes?: number): void => {
    if (answer === null) throw new Error('nothing is on its way');
    answer(fault, bytes);
  };
  return { clock, got, faults, out, takes, isBusy: () => answer !== null };
}

describe('An outlet', () => {
  it('has one write under way and keeps the order of the rest', () => {
    const { out, got, takes } = reader();
    out.write('one ');
    out.write('two ');
    expect(got).toEqual([]);
    takes();
    takes();
    expect(got.join('')).toBe('one two ');
  });

  it('takes what is stale a moment later only when nothing waits', () => {
    const { out, got, takes } = reader();
    expect(out.offer('first')).toBe(true);
    expect(out.offer('stale')).toBe(false);
    takes();
    expect(out.offer('third')).toBe(true);
    takes();
    expect(got).toEqual(['first', 'third']);
  });

  it('sends the rest of a write that was taken in part', () => {
    const { out, got, takes, isBusy } = reader();
    out.write('abcdef');
    takes(null, 2);
    takes(null, 3);
    takes();
    expect(got).toEqual(['ab', 'cde', 'f']);
    expect(isBusy()).toBe(false);
  });

  it('tries again a little later where the descriptor is full', () => {
    const { out, got, takes, isBusy, clock } = reader();
    out.write('text');
    takes('EAGAIN');
    expect(isBusy()).toBe(false);
    clock.runTo(10_000);
    takes();
    expect(got).toEqual(['text']);
  });

  it('drops the oldest of too much, whole, when nobody reads', () => {
    const { out, got, takes, isBusy } = reader();
    const block = 'x'.repeat(100_000);
    for (const name of ['a', 'b', 'c', 'd']) out.write(name + block);
    while (isBusy()) takes();
    // The first is under way; of the other three, two fit into 256 Ki characters.
    expect(got.map((text) => text.slice(0, 1))).toEqual(['a', 'c', 'd']);
  });

  it('says once that nobody reads any more, and takes nothing further', () => {
    const { out, got, takes, faults } = reader();
    out.write('one');
    out.write('two');
    takes('EPIPE');
    out.write('three');
    expect(out.offer('four')).toBe(false);
    expect(faults).toEqual(['EPIPE']);
    expect(got).toEqual([]);
  });

  it('is flushed when all has left', async () => {
    const { out, takes } = reader();
    out.write('one');
    out.write('two');
    let flushed = false;
    const flush = out.flush(1_000_000).then(() => {
      flushed = true;
    });
    takes();
    await Promise.resolve();
    expect(flushed).toBe(false);
    takes();
    await flush;
    expect(flushed).toBe(true);
  });

  it('is not waited for without end', async () => {
    const { out, clock } = reader();
    out.write('one');
    const flush = out.flush(1_000_000);
    clock.runTo(1_000_000);
    await expect(flush).resolves.toBeUndefined();
  });

  it('with nothing in it is flushed at once', async () => {
    await expect(reader().out.flush(1)).resolves.toBeUndefined();
  });
});
