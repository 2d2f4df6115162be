import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { stringify } from 'yaml';
import { loadRig } from '../../src/rig/load.ts';
import type { LoadedRig } from '../../src/rig/load.ts';
import { mistakeLine } from '../../src/rig/mistake.ts';
import { MISTAKE_CODES } from '../../src/rig/mistake-codes.ts';
import { WIRE_ABILITIES } from '../../src/wire/abilities.ts';
import { fromMemory, RIG, STORK } from './memory.ts';
import type { Files } from './memory.ts';

/** A slip of the hand somewhere in a text: something cut out, and something else put there. */
const slip = fc.record({
  at: fc.double({ min: 0, max: 1, noNaN: true }),
  cut: fc.nat(12),
  put: fc.oneof(
    fc.constantFrom(
      '',
      ' ',
      '\n',
      '\n- ',
      ': ',
      '- ',
      '{',
      '}',
      '[',
      ']',
      '"',
      "'",
      '#',
      '&a ',
      '*a',
      '!x ',
      '\t',
      '---\n',
      '%',
      '~',
      '? ',
      '| ',
      '> ',
    ),
    fc.constantFrom('-1', '0', '1e309', '.nan', '.inf', '-0', '0x10', 'true', 'null', 'like: stork.yaml', '__proto__'),
    fc.string({ maxLength: 6, unit: 'binary' }),
  ),
});

function slipped(text: string, slips: readonly { at: number; cut: number; put: string }[]): string {
  return slips.reduce((so, { at, cut, put }) => {
    const start = Math.floor(at * so.length);
    return so.slice(0, start) + put + so.slice(start + cut);
  }, text);
}

/** What holds of whatever a loader says about these files. */
function expectSound(files: Files): LoadedRig | null {
  const loaded = loadRig('rig.yaml', fromMemory(files));
  if (!('mistakes' in loaded)) return loaded;
  expect(loaded.mistakes.length).toBeGreaterThan(0);
  const order = loaded.mistakes.map(
    ({ file, line, column }) => `${file} ${String(line).padStart(6)} ${String(column).padStart(6)}`,
  );
  expect(order).toEqual([...order].sort());
  for (const mistake of loaded.mistakes) {
    expect(MISTAKE_CODES).toHaveProperty(mistake.code);
    // Everything that PCRE and editors take for a line end.
    expect(mistakeLine(mistake)).not.toMatch(/[\n\r]/);
    const lines = (files[mistake.file] ?? '').split(/\r\n|\r|\n/);
    expect(mistake.line).toBeGreaterThanOrEqual(1);
    expect(mistake.line).toBeLessThanOrEqual(lines.length);
    expect(mistake.column).toBeGreaterThanOrEqual(1);
  }
  return null;
}

describe('whatever a file says', () => {
  it('makes a rig, or a list of one-line mistakes in their places: nothing throws', () => {
    fc.assert(
      fc.property(fc.array(slip, { minLength: 1, maxLength: 4 }), fc.array(slip, { maxLength: 4 }), (rig, stork) => {
        expectSound({ 'rig.yaml': slipped(RIG, rig), 'stork.yaml': slipped(STORK, stork) });
      }),
      { numRuns: 200 },
    );
  });

  it('says so of text that never was a rig, too', () => {
    fc.assert(
      fc.property(fc.string({ maxLength: 200, unit: 'binary' }), (text) => {
        expectSound({ 'rig.yaml': text, 'stork.yaml': text });
        expectSound({ 'rig.yaml': `rig: a\nfollowers: [stork.yaml]\n${text}`, 'stork.yaml': `follower: b\n${text}` });
      }),
    );
  });
});

/** Followers that are right, or nearly so. */
const angle = fc.oneof(
  { weight: 9, arbitrary: fc.integer({ min: -60, max: 60 }) },
  { weight: 1, arbitrary: fc.integer({ min: -100, max: 100 }) },
);
const follower = fc
  .record({
    wire: fc.constantFrom('frames', 'firmata'),
    rate_hz: fc.constantFrom(1, 50, 333, 1000),
    joints: fc.array(
      fc.record({
        range: fc.tuple(angle, angle),
        rest: fc.oneof(
          { weight: 9, arbitrary: fc.double({ min: 0, max: 1, noNaN: true }) },
          { weight: 1, arbitrary: fc.constant(1.1) },
        ),
        stretch: fc.boolean(),
        direction: fc.constantFrom('same', 'reversed'),
        gain: fc.constantFrom(0.1, 1, 2.5),
        channel: fc.integer({ min: 0, max: 9 }),
        ends: fc.oneof(
          { weight: 9, arbitrary: fc.tuple(fc.integer({ min: 544, max: 1059 }), fc.integer({ min: 1889, max: 2912 })) },
          { weight: 1, arbitrary: fc.tuple(fc.integer({ min: 500, max: 1100 }), fc.integer({ min: 1850, max: 2950 })) },
        ),
        span: fc.integer({ min: 60, max: 110 }),
        falling: fc.boolean(),
      }),
      { minLength: 1, maxLength: 4 },
    ),
    coupled: fc.option(
      fc.record({ channel: fc.integer({ min: 0, max: 9 }), weight: fc.constantFrom(-1, -0.5, 0.3, 1) }),
      { nil: null },
    ),
  })
  .map(({ wire, rate_hz, joints, coupled }) => {
    const points = (span: number, [low, high]: readonly [number, number], falling: boolean) =>
      falling
        ? [
            [-span, high],
            [0, 1500],
            [span, low],
          ]
        : [
            [-span, low],
            [0, 1500],
            [span, high],
          ];
    return {
      follower: 'stork',
      port: 'serial:/dev/stork?baud=57600',
      wire,
      rate_hz,
      joints: joints.map(({ range, rest, stretch, direction, gain, channel, ends, span, falling }, i) => ({
        name: `j${i}`,
        from: i % 2 === 0 ? 'shoulder' : 'elbow',
        range_deg: [Math.min(...range), Math.max(...range)],
        rest_deg: Math.min(...range) + rest * Math.abs(range[1] - range[0]),
        stretch,
        direction,
        gain,
        speed_deg_s: 60,
        accel_deg_s2: 240,
        // The first joint may hang on a coupled servo instead.
        ...(i === 0 && coupled !== null ? {} : { servo: { channel, points: points(span, ends, falling) } }),
      })),
      servos:
        coupled === null
          ? []
          : [{ channel: coupled.channel, turns: { j0: coupled.weight }, points: points(90, [600, 2400], false) }],
    };
  });

describe('a rig that is accepted', () => {
  it('asks nothing of a servo beyond its points, of a wire beyond its pulses, or of two things on one channel', () => {
    let accepted = 0;
    fc.assert(
      fc.property(
        follower,
        fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { minLength: 4, maxLength: 4 }),
        (file, shares) => {
          const loaded = expectSound({ 'rig.yaml': RIG, 'stork.yaml': stringify(file) });
          if (loaded === null) return;
          accepted++;
          const [spec] = loaded.rig.plan.followers;
          if (spec === undefined) throw new Error('no follower was compiled');
          const pose = spec.joints.map(({ minRad, maxRad }, j) => minRad + (shares[j] ?? 0) * (maxRad - minRad));
          const { pulseMinUs, pulseMaxUs } = WIRE_ABILITIES[file.wire as 'frames' | 'firmata'];
          for (const { map, turns } of spec.servos) {
            const turned = turns.reduce((sum, { joint, weight }) => sum + weight * (pose[joint] ?? Number.NaN), 0);
            // A rounded sum may pass the outer point by less than a nanodegree.
            expect(turned).toBeGreaterThanOrEqual(map.xMin - 1e-9);
            expect(turned).toBeLessThanOrEqual(map.xMax + 1e-9);
            expect(map.yMin).toBeGreaterThanOrEqual(pulseMinUs);
            expect(map.yMax).toBeLessThanOrEqual(pulseMaxUs);
          }
          for (const joint of spec.joints) {
            expect(joint.restRad).toBeGreaterThanOrEqual(joint.minRad);
            expect(joint.restRad).toBeLessThanOrEqual(joint.maxRad);
            for (const number of [joint.gain, joint.offsetRad, joint.speedRadS])
              expect(number).toSatisfy(Number.isFinite);
          }
          const channels = spec.servos.map(({ channel }) => channel);
          expect(new Set(channels).size).toBe(channels.length);
        },
      ),
      { numRuns: 250 },
    );
    // Otherwise nothing was looked at.
    expect(accepted).toBeGreaterThan(0);
  });
});
