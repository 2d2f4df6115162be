import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { compileMap } from '../../src/map/compile.ts';
import { REFRESH_US, type Servo, servo, type ServoOptions } from '../../src/sim/servo.ts';

const DEG = Math.PI / 180;
/** 180 degrees over 1880 us, the spread of the rig files' example servos. */
const MAP = compileMap(
  [
    [-90 * DEG, 560],
    [90 * DEG, 2440],
  ],
  'straight',
  'clamp',
);
const US_PER_DEG = 1880 / 180;
const S = 1_000_000;

const pulseOf = (deg: number): number => MAP.value(deg * DEG);

function built(changes: Partial<ServoOptions> = {}): Servo {
  return servo({ map: MAP, startRad: 0, sagRad: 0, ...changes }, 0);
}

const angleDeg = (tested: Servo, atUs: number): number => tested.angleRad(atUs) / DEG;

/** A servo without play that stands at `deg` under pulses. */
function standing(deg: number, changes: Partial<ServoOptions> = {}): Servo {
  const tested = built({ startRad: deg * DEG, sagRad: deg * DEG, backlashRad: 0, ...changes });
  tested.setPulse(0, pulseOf(deg));
  return tested;
}

describe('a servo that gets its first pulse', () => {
  it('starts at the next refresh of its board and runs at 300 deg/s', () => {
    // 60 degrees in 0.2 s is the usual data-sheet figure of a hobby servo (common practice, no source).
    const tested = built({ backlashRad: 0 });
    tested.setPulse(5_000, pulseOf(60));
    expect(angleDeg(tested, REFRESH_US)).toBe(0);
    expect(angleDeg(tested, REFRESH_US + 100_000)).toBeCloseTo(30, 9);
    expect(angleDeg(tested, REFRESH_US + 200_000)).toBeCloseTo(60, 9);
    expect(angleDeg(tested, 10 * S)).toBeCloseTo(60, 9);
    expect(tested.speedMaxRadS(10 * S) / DEG).toBeCloseTo(300, 6);
  });

  it('slams across 60 degrees when the pulse assumes another pose, and hardly moves when it assumes the right one', () => {
    const wrong = built({ startRad: -60 * DEG });
    wrong.setPulse(0, pulseOf(0));
    expect(wrong.speedMaxRadS(2 * S) / DEG).toBeGreaterThan(250);

    const right = built({ startRad: -60 * DEG, sagRad: -60 * DEG });
    right.setPulse(0, pulseOf(-60));
    expect(right.speedMaxRadS(2 * S) / DEG).toBeLessThan(1);
  });

  it('takes the last of the pulses set within one refresh', () => {
    const tested = built();
    tested.setPulse(1_000, pulseOf(60));
    tested.setPulse(2_000, pulseOf(0));
    expect(angleDeg(tested, S)).toBe(0);
    expect(tested.pulseUs(S)).toBe(pulseOf(0));
  });
});

describe('a servo under pulses', () => {
  it('ignores a change of 4 us and follows one of more', () => {
    const tested = standing(10);
    tested.setPulse(S, pulseOf(10) + 4);
    expect(angleDeg(tested, 2 * S)).toBeCloseTo(10, 9);
    tested.setPulse(2 * S, pulseOf(10) - 4);
    expect(angleDeg(tested, 3 * S)).toBeCloseTo(10, 9);
    tested.setPulse(3 * S, pulseOf(10) + 4.1);
    expect(angleDeg(tested, 4 * S)).toBeCloseTo(10 + 4.1 / US_PER_DEG, 9);
  });

  it('adds small changes up: the deadband is to where it stands, not to the last pulse', () => {
    const tested = standing(0);
    tested.setPulse(S, pulseOf(0) + 3);
    tested.setPulse(2 * S, pulseOf(0) + 6);
    expect(angleDeg(tested, 3 * S)).toBeCloseTo(6 / US_PER_DEG, 9);
  });

  it('loses one degree on the way back: its play', () => {
    const tested = built({ sagRad: -90 * DEG, startRad: -90 * DEG });
    tested.setPulse(0, pulseOf(20));
    const up = angleDeg(tested, 2 * S);
    // The horn trails its shaft by half the play, on whichever side it was pushed from.
    expect(up).toBeCloseTo(19.5, 9);
    tested.setPulse(2 * S, pulseOf(19.1));
    expect(angleDeg(tested, 3 * S)).toBeCloseTo(19.5, 9);
    tested.setPulse(3 * S, pulseOf(10));
    expect(angleDeg(tested, 4 * S)).toBeCloseTo(10.5, 9);
  });

  it('turns round in mid-run when the pulse changes', () => {
    const tested = built({ backlashRad: 0 });
    tested.setPulse(0, pulseOf(60));
    // Pulses begin at 20 ms; 80 ms of running is 24 degrees; the pulse of 95 ms is taken at 100 ms.
    tested.setPulse(95_000, pulseOf(0));
    expect(angleDeg(tested, 100_000)).toBeCloseTo(24, 9);
    expect(angleDeg(tested, 140_000)).toBeCloseTo(12, 9);
    expect(angleDeg(tested, S)).toBeCloseTo(0, 9);
  });

  it('never turns faster than 300 deg/s, whatever it is told', () => {
    const event = fc.record({
      dtUs: fc.integer({ min: 1, max: 300_000 }),
      what: fc.constantFrom('pulse', 'none', 'off', 'on', 'look'),
      pulseUs: fc.integer({ min: 300, max: 2_700 }),
    });
    fc.assert(
      fc.property(
        fc.array(event, { maxLength: 60 }),
        fc.double({ min: -2, max: 2, noNaN: true }),
        (events, startRad) => {
          const tested = built({ startRad, sagRad: -1.2 });
          let atUs = 0;
          let last = tested.angleRad(0);
          for (const { dtUs, what, pulseUs } of events) {
            atUs += dtUs;
            if (what === 'pulse') tested.setPulse(atUs, pulseUs);
            if (what === 'none') tested.setPulse(atUs, Number.NaN);
            if (what === 'off') tested.setPower(atUs, false);
            if (what === 'on') tested.setPower(atUs, true);
            const angle = tested.angleRad(atUs);
            expect(Math.abs(angle - last)).toBeLessThanOrEqual((300 * DEG * dtUs) / S + 1e-9);
            last = angle;
          }
          expect(tested.speedMaxRadS(atUs)).toBeLessThanOrEqual(300 * DEG + 1e-9);
        },
      ),
    );
  });

  it('stands where it stands however often it is looked at', () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: 1, max: 1_500_000 }), { maxLength: 40 }),
        fc.integer({ min: 600, max: 2_400 }),
        (looks, pulseUs) => {
          const seen = built({ startRad: 0.3, sagRad: -1 });
          const left = built({ startRad: 0.3, sagRad: -1 });
          for (const tested of [seen, left]) tested.setPulse(70_001, pulseUs);
          for (const atUs of looks.sort((a, b) => a - b)) if (atUs >= 70_001) seen.angleRad(atUs);
          seen.setPulse(1_500_001, Number.NaN);
          left.setPulse(1_500_001, Number.NaN);
          expect(seen.angleRad(1_600_000)).toBeCloseTo(left.angleRad(1_600_000), 12);
          expect(seen.speedMaxRadS(1_600_000)).toBeCloseTo(left.speedMaxRadS(1_600_000), 9);
        },
      ),
    );
  });
});

describe('a servo without pulses or power', () => {
  it('sags at 60 deg/s towards where gravity takes it, from the first instant', () => {
    const tested = built({ startRad: 50 * DEG, sagRad: -40 * DEG });
    expect(angleDeg(tested, S / 2)).toBeCloseTo(20, 9);
    expect(angleDeg(tested, 2 * S)).toBeCloseTo(-40, 9);
  });

  it('sags when its pulses end', () => {
    const tested = standing(50, { sagRad: -40 * DEG });
    tested.setPulse(S, Number.NaN);
    // Set at a refresh, so the pulses end at the next one, 20 ms later; 0.5 s of sagging is 30 degrees.
    expect(angleDeg(tested, S + 20_000)).toBeCloseTo(50, 9);
    expect(angleDeg(tested, S + 520_000)).toBeCloseTo(20, 9);
    expect(tested.pulseUs(2 * S)).toBeNaN();
  });

  it('sags without power although pulses come, and runs back when power does', () => {
    const tested = standing(50, { sagRad: -40 * DEG });
    tested.setPower(S, false);
    expect(angleDeg(tested, 1.5 * S)).toBeCloseTo(20, 9);
    expect(tested.pulseUs(1.5 * S)).toBe(pulseOf(50));
    tested.forgetSpeed(3 * S);
    tested.setPower(3 * S, true);
    expect(angleDeg(tested, 4 * S)).toBeCloseTo(50, 9);
    expect(tested.speedMaxRadS(4 * S) / DEG).toBeCloseTo(300, 6);
  });

  it('holds after its last pulse if it is of the kind that does, until power goes', () => {
    const tested = standing(50, { sagRad: -40 * DEG, holdsLostPulse: true });
    tested.setPulse(S, Number.NaN);
    expect(angleDeg(tested, 3 * S)).toBeCloseTo(50, 9);
    tested.setPower(3 * S, false);
    expect(angleDeg(tested, 5 * S)).toBeCloseTo(-40, 9);
    tested.setPower(5 * S, true);
    expect(angleDeg(tested, 6 * S)).toBeCloseTo(-40, 9);
  });

  it('has nothing to hold before its first pulse', () => {
    const tested = built({ startRad: 50 * DEG, sagRad: -40 * DEG, holdsLostPulse: true });
    expect(angleDeg(tested, 2 * S)).toBeCloseTo(-40, 9);
  });
});
