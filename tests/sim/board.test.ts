import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { simulatedHand } from '../../src/sim/hand.ts';
import type { WireChoice } from '../../src/wire/choice.ts';
import type { BoardPlan } from '../../src/wire/types.ts';
import { armServo, DEG, HAND, MS, PLAN, S, simAddress, type Stage, stage, WIRES } from './troupe.ts';

const NAMES = Object.keys(WIRES) as WireChoice['name'][];

/** Play of one degree to either side, and the deadband of 4 us of a servo with 1856 us over 180 degrees. */
const SLACK_DEG = 1 + (4 * 180) / 1856;

function angleDeg(on: Stage, servo: number): number {
  return (on.board.arms[0]?.angleRad(servo) ?? Number.NaN) / DEG;
}

function pulseUs(on: Stage, servo: number): number {
  return on.board.arms[0]?.pulseUs(servo) ?? Number.NaN;
}

/** Booted, powered and ready. */
function woken(name: WireChoice['name'] | WireChoice, changes: Parameters<typeof stage>[1] = {}): Stage {
  const on = stage(name, changes);
  on.run(S);
  expect(on.heard).toContain('ready');
  on.say((out) => on.session.power(0, true, out));
  on.run(20 * MS);
  return on;
}

describe.each(NAMES)('a simulated board that speaks %s', (name) => {
  it('is silent until it has booted, then is ready', () => {
    const on = stage(name);
    on.run(290 * MS);
    expect(on.heard).not.toContain('ready');
    on.run(50 * MS);
    expect(on.heard.filter((kind) => kind === 'ready')).toHaveLength(1);
    expect(on.heard).not.toContain('garbled');
  });

  it('reads what the hand shows at that instant', () => {
    const on = stage(name);
    on.run(5 * S);
    expect(on.readings.length).toBeGreaterThan(300);
    const hand = simulatedHand({ ...HAND, seed: 3 });
    const shown = new Float64Array(4);
    const complete = on.readings.filter(({ counts }) => !counts.some(Number.isNaN));
    expect(complete.length).toBeGreaterThan(on.readings.length / 2);
    for (const { atUs, counts } of complete) {
      hand.countsAt(atUs, shown);
      expect(counts).toEqual([...shown]);
    }
  });

  it('drives its servos to what a command says', () => {
    const on = woken(name);
    const sent = on.command([-20, 45]);
    on.run(S);
    expect([pulseUs(on, 0), pulseUs(on, 1)]).toEqual(sent);
    expect(Math.abs(angleDeg(on, 0) - -20)).toBeLessThan(SLACK_DEG);
    expect(Math.abs(angleDeg(on, 1) - 45)).toBeLessThan(SLACK_DEG);
  });

  it('has no pulses before the first command', () => {
    const on = woken(name);
    on.run(S);
    expect(pulseUs(on, 0)).toBeNaN();
    expect(angleDeg(on, 0)).toBeCloseTo(-60, 9);
  });

  it('ends its pulses when told to', () => {
    const on = woken(name);
    on.command([-20, 45]);
    on.run(S);
    on.say((out) => on.session.limp(0, out));
    on.run(2 * S);
    expect(pulseUs(on, 0)).toBeNaN();
    expect(pulseUs(on, 1)).toBeNaN();
    expect(angleDeg(on, 0)).toBeCloseTo(-60, 9);
  });

  it('moves nothing before power is on and after it is off', () => {
    const on = stage(name);
    on.run(S);
    on.command([-20, 45]);
    on.run(S);
    expect(angleDeg(on, 0)).toBeCloseTo(-60, 9);
    on.say((out) => on.session.power(0, true, out));
    on.run(S);
    expect(Math.abs(angleDeg(on, 0) - -20)).toBeLessThan(SLACK_DEG);
    on.say((out) => on.session.power(0, false, out));
    on.run(2 * S);
    expect(angleDeg(on, 0)).toBeCloseTo(-60, 9);
  });

  it('slams when the first pulse assumes a pose 60 degrees away, and hardly moves when it assumes the right one', () => {
    const wrong = woken(name);
    wrong.command([0, 30]);
    wrong.run(S);
    // A hobby servo's data-sheet speed, 60 degrees in 0.2 s (common practice, no source).
    expect((wrong.board.arms[0]?.speedMaxRadS(0) ?? 0) / DEG).toBeGreaterThan(250);

    const right = woken(name);
    right.command([-60, 30]);
    right.run(S);
    // The wire rounds the pulse to 1 us or less: 0.1 degrees, 5 deg/s over one refresh of 20 ms.
    for (const servo of [0, 1]) {
      expect((right.board.arms[0]?.speedMaxRadS(servo) ?? Number.NaN) / DEG).toBeLessThan(5);
    }
  });

  it('loses pulses, power and the greeting when it is reset in mid-run, and says so', () => {
    const on = woken(name);
    on.command([-20, 45]);
    on.run(S);
    on.board.reset();
    on.run(40 * MS);
    expect(pulseUs(on, 0)).toBeNaN();
    on.run(2 * S);
    expect(on.board.arms[0]?.powered).toBe(false);
    expect(angleDeg(on, 0)).toBeCloseTo(-60, 9);
    expect(on.heard.filter((kind) => kind === 'reboot' || kind === 'ready')).toEqual(['ready', 'reboot', 'ready']);
  });

  it('boots again when its port opens again', () => {
    const on = woken(name);
    on.command([-20, 45]);
    on.run(S);
    on.board.far.unplug();
    on.run(S);
    // Nobody took its power: the servos hold.
    expect(Math.abs(angleDeg(on, 0) - -20)).toBeLessThan(SLACK_DEG);
    const before = on.readings.length;
    on.board.far.replug();
    on.run(8 * S);
    expect(pulseUs(on, 0)).toBeNaN();
    expect(on.heard.filter((kind) => kind === 'ready')).toHaveLength(2);
    expect(on.readings.length).toBeGreaterThan(before + 50);
  });

  it('wakes up for nothing once its port is closed', async () => {
    const on = woken(name);
    const closed = on.board.port.close();
    on.run(2 * S);
    await closed;
    on.board.reset();
    on.run(2 * S);
    expect(on.clock.nextUs()).toBe(Number.POSITIVE_INFINITY);
  });

  it('does the same every time for the same seed', () => {
    const run = (seed: number): Stage => {
      const on = woken(name, { address: simAddress(`sim:arm?name=wren&seed=${seed}&drop=0.2`) });
      for (let step = 0; step < 20; step++) {
        on.command([-20 + step, 45 - step]);
        on.run(20 * MS);
      }
      return on;
    };
    const [first, again, other] = [run(3), run(3), run(4)];
    expect(again.readings).toEqual(first.readings);
    expect(angleDeg(again, 0)).toBe(angleDeg(first, 0));
    expect(other.readings).not.toEqual(first.readings);
  });

  it('loses the share of frames it was asked to lose', () => {
    const share = 0.1;
    const on = stage(name, { address: simAddress(`sim:arm?name=wren&seed=3&drop=${share}`) });
    on.run(20 * S);
    const { messages, lost } = on.board;
    expect(messages).toBeGreaterThan(3_000);
    // Five standard errors of a binomial share: sqrt(p(1-p)/n).
    const error = Math.sqrt((share * (1 - share)) / messages);
    expect(Math.abs(lost / messages - share)).toBeLessThan(5 * error);
    const whole = stage(name);
    whole.run(20 * S);
    expect(whole.board.lost).toBe(0);
    const arrived = (from: Stage): number =>
      from.readings.reduce((sum, { counts }) => sum + counts.filter((each) => !Number.isNaN(each)).length, 0);
    expect(arrived(on) / arrived(whole)).toBeLessThan(0.95);
  });

  it('loses commands too', () => {
    const plan: BoardPlan = { ...PLAN, inputs: null };
    const on = woken(name, { plan, address: simAddress('sim:arm?name=wren&seed=3&drop=1') });
    on.command([-20, 45]);
    on.run(S);
    expect(on.board.lost).toBeGreaterThan(0);
    // It stays where it was, or on Firmata, where attaching alone starts pulses, runs to 1500 us.
    expect(Math.abs(angleDeg(on, 0) - -20)).toBeGreaterThan(15);
  });
});

describe('a simulated board that hears noise', () => {
  it.each(NAMES)('and speaks %s goes on, with its servos somewhere', (name) => {
    const bytes = fc.uint8Array({ minLength: 1, maxLength: 80 });
    const text = fc.stringMatching(/^[W0-9.,-]{0,30}\n$/).map((line) => new TextEncoder().encode(line));
    const sysex = fc.array(fc.nat(127), { maxLength: 80 }).map((body) => Uint8Array.of(0xf0, ...body, 0xf7));
    fc.assert(
      fc.property(fc.array(fc.oneof(bytes, text, sysex), { maxLength: 12 }), (noise) => {
        const on = woken(name);
        for (const each of noise) {
          on.send(each);
          on.run(30 * MS);
        }
        expect(Number.isFinite(angleDeg(on, 0))).toBe(true);
        expect(Math.abs(angleDeg(on, 0))).toBeLessThanOrEqual(91);
      }),
      { numRuns: 50 },
    );
  });
});

describe('a relay that is on when its pin is low', () => {
  const [output] = PLAN.outputs as readonly [BoardPlan['outputs'][0]];
  const plan: BoardPlan = { ...PLAN, outputs: [{ ...output, power: { channel: 8, on: 'low' } }] };

  it.each(NAMES)('switches as it is told over %s', (name) => {
    const on = stage(name, { plan });
    on.run(S);
    for (const wish of [true, false, true]) {
      on.say((out) => on.session.power(0, wish, out));
      on.run(100 * MS);
      expect(on.board.arms[0]?.powered).toBe(wish);
    }
  });

  it('switches on by itself when a Firmata board starts, which drives its pins low', () => {
    // firmata/arduino, StandardFirmata.ino, systemResetCallback: every digital pin becomes an output, low.
    const on = stage('firmata', { plan });
    on.run(200 * MS);
    expect(on.board.arms[0]?.powered).toBe(false);
    on.run(S);
    expect(on.board.arms[0]?.powered).toBe(true);
  });
});

describe('an echo', () => {
  it('comes back with its number, over frames with the time since the reset', () => {
    const on = woken('frames');
    const atUs = on.clock.nowUs();
    on.say((out) => on.session.echo(7, out));
    on.run(MS);
    // The port opened, and the board was reset, at the very start.
    expect(on.echoes).toEqual([{ id: 7, boardUs: atUs }]);
  });

  it('comes back with its number over firmata, as the state of a pin', () => {
    const on = woken('firmata');
    on.say((out) => on.session.echo(7, out));
    on.run(MS);
    expect(on.echoes.map((each) => each.id)).toEqual([7]);
  });
});

describe('a sketch that prints', () => {
  const lines = (WIRES.lines as Extract<WireChoice, { name: 'lines' }>).lines;

  it('says nothing but numbers when it has no name', () => {
    const on = stage('lines', { address: simAddress('sim:arm?seed=3') });
    on.run(500 * MS);
    expect(on.heard.filter((kind) => kind !== 'reading')).toEqual(['ready']);
  });

  it('only on change is silent while nothing changes', () => {
    const wire: WireChoice = { name: 'lines', lines: { ...lines, sends: 'on_change', checksum: 'sum' } };
    const on = stage(wire, { hand: { ...HAND, noiseCounts: 0 } });
    on.run(990 * MS);
    expect(on.readings.length).toBeLessThanOrEqual(1);
    on.run(3 * S);
    expect(on.readings.length).toBeGreaterThan(100);
    expect(on.heard).not.toContain('garbled');
  });

  it('throws away what is no command of its own, up to the end of the line', () => {
    const on = woken('lines');
    on.send(new TextEncoder().encode('rubbish W1000,1'));
    on.send(new TextEncoder().encode('000\nW1000,2000\n'));
    on.run(100 * MS);
    expect([pulseUs(on, 0), pulseUs(on, 1)]).toEqual([1000, 2000]);
  });
});

describe('a simulated board on a slow line', () => {
  it('is the same board, later', () => {
    const on = woken('frames', { line: { baud: 115_200, chunkBytes: 64 } });
    const sent = on.command([-20, 45]);
    on.run(S);
    expect(pulseUs(on, 0)).toBe(sent[0]);
    expect(on.heard).not.toContain('garbled');
  });
});

describe('lost frames', () => {
  it('are noticed where the wire numbers them', () => {
    const on = stage('frames', { address: simAddress('sim:arm?seed=3&drop=0.1') });
    on.run(5 * S);
    expect(on.heard).toContain('lost');
  });
});

describe('a sketch that is told degrees', () => {
  const wire: WireChoice = {
    name: 'lines',
    lines: {
      separator: null,
      sends: 'on_change',
      checksum: null,
      template: 'S{{{shoulder.deg:2}}}\nE{elbow.deg}\n',
      limp: null,
      powerOn: null,
      powerOff: null,
    },
  };
  const output = (PLAN.outputs as readonly [BoardPlan['outputs'][0]])[0];
  const plan: BoardPlan = {
    ...PLAN,
    inputs: null,
    outputs: [
      {
        ...output,
        power: null,
        servos: [...output.servos, { channel: 6, minUs: 544, maxUs: 2400, joint: 'elbow' }],
      },
    ],
  };
  /** A parallelogram elbow: its second servo turns with the sum of both joints. */
  const arms = [
    {
      name: 'wren',
      servos: [
        armServo(0, 0),
        armServo(1, 0),
        armServo(1, 0, {
          turns: [
            { joint: 0, weight: 1 },
            { joint: 1, weight: 1 },
          ],
        }),
      ],
    },
  ];

  it('turns each servo through its own map, over several lines and coupled joints', () => {
    const on = stage(wire, { plan, arms });
    on.run(3 * S);
    on.command([30, -10, 0]);
    on.run(S);
    expect(Math.abs(angleDeg(on, 0) - 30)).toBeLessThan(SLACK_DEG);
    expect(Math.abs(angleDeg(on, 1) - -10)).toBeLessThan(SLACK_DEG);
    expect(Math.abs(angleDeg(on, 2) - 20)).toBeLessThan(SLACK_DEG);
  });
});

describe('a plan that does not fit the hand and the arms', () => {
  it('is refused, because it is our own mistake', () => {
    expect(() => stage('frames', { arms: [] })).toThrow(RangeError);
    expect(() => stage('frames', { hand: null })).toThrow(RangeError);
  });
});
