import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { captureLine, CAPTURES_HEADER, readCaptures } from '../../src/cli/fit-captures-csv.ts';
import { CAPTURE_STEPS, type Capture, type CaptureStep, emptyCapture } from '../../src/fit/captures.ts';
import type { SessionEffect } from '../../src/fit/prompt.ts';
import { session, type Session } from '../../src/fit/session.ts';
import { loadRig } from '../../src/rig/load.ts';

const RIG = `rig: bench
leader: { leader: stick, port: sim:hand, wire: lines, counts: [0, 1023], joints: [{ name: base, channel: 0, points: [[100, -100], [900, 100]] }, { name: elbow, channel: 1, points: [[100, -100], [900, 100]] }] }
followers:
  - follower: wren
    port: "sim:arm?name=wren"
    wire: { lines: { template: "{base.us},{elbow.us}\\n" } }
    wake: ask
    joints:
      - { name: base, from: base, range_deg: [-60, 60], speed_deg_s: 60, accel_deg_s2: 240, servo: { channel: 0, points: [[-90, 600], [90, 2400]] } }
      - { name: elbow, range_deg: [-60, 60], speed_deg_s: 60, accel_deg_s2: 240, servo: { channel: 1, points: [[-90, 600], [90, 2400]] } }
`;

function profiles() {
  const loaded = loadRig('bench.yaml', () => ({ text: RIG }));
  if ('mistakes' in loaded) throw new Error(JSON.stringify(loaded.mistakes));
  return loaded.profiles;
}

interface Seat {
  readonly at: Session;
  type(...lines: readonly string[]): void;
  read(n: number, ...counts: readonly number[]): void;
  said(): string;
  readonly did: SessionEffect[];
}

function seat(captured: readonly Capture[] = []): Seat {
  const at = session(profiles(), captured, null);
  const did: SessionEffect[] = [];
  let tUs = 0;
  const after = (): void => void did.push(...at.effects());
  return {
    at,
    did,
    type(...lines) {
      for (const text of lines) {
        at.take({ kind: 'line', text });
        after();
      }
    },
    read(n, ...counts) {
      for (let i = 0; i < n; i++) {
        tUs += 10_000;
        at.take({ kind: 'reading', tUs, counts: Float64Array.from(counts) });
      }
      after();
    },
    said: () => at.said().join('\n'),
  };
}

/** Number of a step in the list. */
const stepOf = (text: string, kind: string, joint: string): string =>
  new RegExp(`${kind} .*?(\\d+) ${joint}\\b`).exec(text)?.[1] ?? '';
const kept = (did: readonly SessionEffect[]): readonly Capture[] =>
  did.flatMap((each) => (each.kind === 'keep' ? each.captures : []));

describe('A session’s list', () => {
  it('has every step of the rig, and no match for a joint that copies nothing', () => {
    const text = seat().said();
    expect(text.split('\n').slice(4)).toEqual([
      '',
      'horn of wren       1 base   2 elbow',
      'wiring of stick    3 base   4 elbow',
      'wiring of wren     5 base   6 elbow',
      'rest of stick      7 all joints',
      'sweep of stick     8 base   9 elbow',
      'points of stick    10 base   11 elbow',
      'travel of wren     12 base   13 elbow',
      'deadband of wren   14 base   15 elbow',
      'match of wren      16 base',
      '+ is done, - is skipped',
      '',
    ]);
  });

  it('says so when there is no such step, and goes on asking', () => {
    const { at, type, said } = seat();
    said();
    type('99');
    expect(said()).toBe('There is no step 99.');
    expect(at.prompt.ask).toMatch(/^Enter: 1 horn of wren base \(/);
  });

  it('marks a step that is skipped, and offers the next one', () => {
    const { at, type, said } = seat();
    said();
    type('1', 'skip', 'list');
    expect(said()).toMatch(/horn of wren base is skipped\.[^]*horn of wren +-1 base {3}2 elbow/);
    expect(at.prompt.ask).toMatch(/^Enter: 2 horn of wren elbow \(/);
  });

  it('does not call a step done that has nothing to show', () => {
    const { type, said } = seat();
    const step = stepOf(said(), 'points of stick', 'base');
    type(step, '', 'list');
    expect(said()).toMatch(/No point was taken\.[^]*points of stick +10 base/);
  });
});

describe('A step', () => {
  it('keeps each point at once, and begins a new attempt when it is done anew', () => {
    const { type, read, said, did } = seat();
    const step = stepOf(said(), 'points of stick', 'base');
    type(step, '10');
    read(50, 540, 500);
    expect(kept(did)).toMatchObject([{ step: 'leader-point', counts: 540, knownDeg: 10, attempt: 1 }]);
    type('redo', '12');
    read(50, 548, 500);
    expect(kept(did)[1]).toMatchObject({ counts: 548, knownDeg: 12, attempt: 2 });
    expect(said()).toContain('Point 1: 548.0 counts at 12 deg.');
  });

  it('asks again for what is no number', () => {
    const { at, type, said } = seat();
    const step = stepOf(said(), 'points of stick', 'base');
    said();
    type(step);
    said();
    type('twelve');
    expect(said()).toBe('That is no number. Write it with a point, such as 12.5.');
    expect(at.prompt.ask).toContain('Angle of base');
  });

  it('takes no hold at the end of the converter’s range', () => {
    const { type, read, said, did } = seat();
    type(stepOf(said(), 'points of stick', 'base'), '10');
    read(50, 0, 500);
    expect(said()).toContain('it reads at the end of the converter’s range');
    expect(kept(did)).toEqual([]);
  });

  it('that is wired to another channel is measured there, and says so in its captures', () => {
    const { type, read, said, did } = seat();
    const text = said();
    type(stepOf(text, 'wiring of stick', 'base'));
    for (let i = 0; i < 200; i++) read(1, 500, 500 + 300 * Math.sin(i / 20));
    type('');
    expect(said()).toContain('base is on channel 1, which the profile gives to elbow');
    type(stepOf(text, 'points of stick', 'base'), '10');
    read(50, 300, 600);
    expect(kept(did)).toMatchObject([{ joint: 'base', counts: 600, channel: 1 }]);
  });

  it('sends no servo anywhere before the arm is cleared and awake', () => {
    const { at, type, did } = seat();
    type('1');
    expect(did).toEqual([]);
    type('yes');
    expect(did).toEqual([{ kind: 'wake', follower: 0 }]);
    at.take({ kind: 'awake', follower: 0 });
    expect(at.effects()).toEqual([{ kind: 'jog', follower: 0, servo: 0, pulseUs: 1500 }]);
  });

  it('is left, and its arm has to be cleared anew, when the arm loses its pulses', () => {
    const { at, type, said, did } = seat();
    type('1', 'yes');
    at.take({ kind: 'awake', follower: 0 });
    at.take({ kind: 'asleep', follower: 0, why: 'wren has lost its pulses.' });
    expect(said()).toContain('wren has lost its pulses. The step was left');
    at.effects();
    did.length = 0;
    type('1');
    expect(at.prompt.ask).toContain('Type yes');
    expect(did).toEqual([]);
  });
});

describe('A session that is to be fitted', () => {
  const wish = { jitterM: 0.0001, lagS: 0.06 };
  const ARM = 'arm: { links: [{ joint: base, axis: z, to_mm: [400, 0, 0] }] }';
  const armed = loadRig('bench.yaml', () => ({ text: RIG.replace('wake: ask', `wake: ask\n    ${ARM}`) }));
  const trembling = Array.from({ length: 200 }, (_, i) => ({
    ...emptyCapture('leader-still', 'stick', 'base'),
    counts: 500 + (i % 3),
  }));
  const offered = (): Session => {
    if ('mistakes' in armed) throw new Error(JSON.stringify(armed.mistakes));
    const at = session(armed.profiles, trembling, wish);
    at.said();
    at.take({ kind: 'line', text: 'fit' });
    return at;
  };

  it('offers smoothing, and writes it only to who says yes', () => {
    for (const [text, smooth] of [
      ['yes', true],
      ['no', false],
      ['', false],
    ] as const) {
      const at = offered();
      expect(at.over).toBe(false);
      expect(at.said().join('\n')).toMatch(/base: smooth: \{ cutoff_hz: [\d.]+ \}/);
      at.take({ kind: 'line', text });
      expect(at.effects()).toEqual([{ kind: 'end', fit: true, smooth }]);
    }
  });

  it('asks again for what is neither yes nor no, and can be gone back from', () => {
    const at = offered();
    at.said();
    at.take({ kind: 'line', text: 'perhaps' });
    expect(at.said()).toEqual(['Type yes to have it, or Enter for the maps alone.']);
    at.take({ kind: 'line', text: 'list' });
    expect(at.said().join('\n')).toContain('sweep of stick');
    expect(at.prompt.ask).toContain('or a number');
    expect(at.over).toBe(false);
  });

  it('offers nothing where nothing is to be smoothed', () => {
    const { at, type } = seat();
    type('fit');
    expect(at.over).toBe(true);
  });
});

it('A session that ends says what is to be done with its captures', () => {
  for (const [text, fit] of [
    ['fit', true],
    ['quit', false],
  ] as const) {
    const { at, type, did } = seat();
    type(text);
    expect(did).toEqual([{ kind: 'end', fit, smooth: false }]);
    expect(at.over).toBe(true);
  }
});

it('Captures are read back as they were written', () => {
  const number = fc.option(fc.double({ noNaN: true, noDefaultInfinity: true }), { nil: Number.NaN });
  const capture = fc.record({
    step: fc.constantFrom(...(Object.keys(CAPTURE_STEPS) as CaptureStep[])),
    counts: fc.double({ noNaN: true, noDefaultInfinity: true }),
    pulseUs: fc.double({ noNaN: true, noDefaultInfinity: true }),
    knownDeg: fc.double({ noNaN: true, noDefaultInfinity: true }),
    tMs: number,
    noiseCounts: number,
    moved: fc.constantFrom(0, 1),
    channel: number,
    attempt: number,
  });
  fc.assert(
    fc.property(fc.array(capture, { maxLength: 20 }), (captures) => {
      const whole = captures.map((each) => ({ ...emptyCapture(each.step, 'stick', 'base'), ...each }));
      const read = readCaptures(CAPTURES_HEADER + whole.map(captureLine).join(''));
      // Zero has no sign in a file.
      const plain = (each: Capture): unknown => Object.values(each).map((value) => (value === 0 ? 0 : value));
      expect('captures' in read ? read.captures.map(plain) : read.mistakes).toEqual(whole.map(plain));
    }),
  );
});
