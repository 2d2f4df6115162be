import { describe, expect, it, vi } from 'vitest';
import { type Clock, realClock, US_PER_MS } from '../../src/clock/clock.ts';

/** Waits for one wake-up of a real clock, and says when it came. */
function firedAt(clock: Clock, atUs: number): Promise<number> {
  return new Promise((resolve) => clock.at(atUs, () => resolve(clock.nowUs())));
}

describe('the real clock', () => {
  it('counts whole microseconds and never goes back', () => {
    const clock = realClock();
    let before = clock.nowUs();
    for (let i = 0; i < 10_000; i++) {
      const now = clock.nowUs();
      expect(Number.isSafeInteger(now) && now >= before).toBe(true);
      before = now;
    }
  });

  it('wakes nobody early: timers count whole milliseconds, and instants do not', async () => {
    const clock = realClock();
    const startUs = clock.nowUs();
    const asked = [0, 1, 499, 500, 999, 1_001, 1_500, 1_999, 3_700, 4_999, 9_501].map((after) => startUs + after);
    const fired = await Promise.all(asked.map((atUs) => firedAt(clock, atUs)));
    fired.forEach((us, i) => expect(us).toBeGreaterThanOrEqual(asked[i] as number));
  });

  it('wakes nobody from inside the asking, even for an instant that has passed', async () => {
    const clock = realClock();
    const order: string[] = [];
    const woken = new Promise<void>((resolve) => {
      clock.at(clock.nowUs() - US_PER_MS, () => {
        order.push('woken');
        resolve();
      });
    });
    order.push('asked');
    await woken;
    expect(order).toEqual(['asked', 'woken']);
  });

  it('does not wake for what was taken back', async () => {
    const clock = realClock();
    const fired: string[] = [];
    const startUs = clock.nowUs();
    const cancel = clock.at(startUs + 2 * US_PER_MS, () => fired.push('cancelled'));
    cancel();
    await firedAt(clock, startUs + 4 * US_PER_MS);
    cancel();
    expect(fired).toEqual([]);
  });

  it('reaches an instant further away than one timer does', () => {
    // setTimeout counts milliseconds in 31 bits and fires at once past them; here is a clock to turn by hand.
    vi.useFakeTimers({ toFake: ['setTimeout', 'clearTimeout', 'performance'] });
    try {
      const clock = realClock();
      const farMs = 3 * 2 ** 31;
      let fired = 0;
      clock.at(clock.nowUs() + farMs * US_PER_MS, () => fired++);
      vi.advanceTimersByTime(farMs - 1);
      expect(fired).toBe(0);
      vi.advanceTimersByTime(2);
      expect(fired).toBe(1);
    } finally {
      vi.useRealTimers();
    }
  });
});
