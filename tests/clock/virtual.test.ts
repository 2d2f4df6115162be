import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { virtualClock } from '../../src/clock/virtual.ts';

describe('the virtual clock', () => {
  it('stands where it is put, and where it is told to run to', () => {
    const clock = virtualClock(5_000);
    expect(clock.nowUs()).toBe(5_000);
    clock.runTo(7_500);
    expect(clock.nowUs()).toBe(7_500);
  });

  it('never goes back', () => {
    const clock = virtualClock(1_000);
    clock.runTo(10);
    expect(clock.nowUs()).toBe(1_000);
  });

  it('fires in order of time, and of asking where the time is the same', () => {
    const clock = virtualClock();
    const fired: string[] = [];
    const note = (name: string) => (): unknown => fired.push(`${clock.nowUs()} ${name}`);
    clock.at(30, note('last'));
    clock.at(10, note('first'));
    clock.at(20, note('second'));
    clock.at(20, note('third'));
    clock.runTo(30);
    expect(fired).toEqual(['10 first', '20 second', '20 third', '30 last']);
  });

  it('fires what is due exactly where it stops, and nothing later', () => {
    const clock = virtualClock();
    const fired: number[] = [];
    clock.at(100, () => fired.push(100));
    clock.at(101, () => fired.push(101));
    clock.runTo(100);
    expect(fired).toEqual([100]);
    expect(clock.nextUs()).toBe(101);
  });

  it('fires what a wake-up asks for in the same run, at once if its instant has passed, but never from inside the asking', () => {
    const clock = virtualClock();
    const fired: string[] = [];
    clock.at(10, () => {
      clock.at(5, () => fired.push(`${clock.nowUs()} overdue`));
      clock.at(15, () => fired.push(`${clock.nowUs()} next`));
      fired.push(`${clock.nowUs()} asking`);
    });
    clock.runTo(20);
    expect(fired).toEqual(['10 asking', '10 overdue', '15 next']);
  });

  it('fires each wake-up once, and none that was taken back', () => {
    const clock = virtualClock();
    const fired: string[] = [];
    const cancel = clock.at(10, () => fired.push('cancelled'));
    const early = clock.at(5, () => fired.push('fired'));
    cancel();
    clock.runTo(100);
    early();
    cancel();
    clock.runTo(200);
    expect(fired).toEqual(['fired']);
    expect(clock.nextUs()).toBe(Number.POSITIVE_INFINITY);
  });

  it('lets a wake-up take back another that is due at the same instant', () => {
    const clock = virtualClock();
    const fired: string[] = [];
    clock.at(10, () => cancel());
    const cancel = clock.at(10, () => fired.push('cancelled'));
    clock.runTo(10);
    expect(fired).toEqual([]);
  });

  it('fires late by what is planted, and shows the late instant', () => {
    const lateness = [3, 0, 40];
    const clock = virtualClock(0, () => lateness.shift() ?? 0);
    const fired: string[] = [];
    for (const at of [10, 20, 30]) clock.at(at, () => fired.push(`${at} at ${clock.nowUs()}`));
    clock.runTo(100);
    expect(fired).toEqual(['10 at 13', '20 at 20', '30 at 70']);
  });

  it('fires any set of wake-ups, each once, in order, and none early, whatever is taken back', () => {
    const wakes = fc.array(
      fc.record({ at: fc.nat(1_000), late: fc.nat(50), cancelled: fc.boolean(), nested: fc.nat(100) }),
      { maxLength: 40 },
    );
    fc.assert(
      fc.property(wakes, fc.array(fc.nat(1_500), { maxLength: 6 }), (asked, stops) => {
        const late = asked.map((wake) => wake.late);
        const clock = virtualClock(0, () => late.shift() ?? 0);
        const fired: { readonly index: number; readonly us: number }[] = [];
        let nested = 0;
        const cancels = asked.map((wake, index) =>
          clock.at(wake.at, () => {
            fired.push({ index, us: clock.nowUs() });
            clock.at(clock.nowUs() + wake.nested, () => nested++);
          }),
        );
        asked.forEach((wake, index) => wake.cancelled && cancels[index]?.());
        for (const stop of stops) clock.runTo(stop);
        clock.runTo(10_000);
        const kept = asked.flatMap((wake, index) => (wake.cancelled ? [] : [index]));
        expect(fired.map((f) => f.index).toSorted((a, b) => a - b)).toEqual(kept);
        expect(nested).toBe(kept.length);
        for (const { index, us } of fired) {
          const wake = asked[index] as (typeof asked)[number];
          expect(us).toBe(wake.at + wake.late);
        }
        expect(fired.map((f) => f.us)).toEqual(fired.map((f) => f.us).toSorted((a, b) => a - b));
      }),
    );
  });
});
