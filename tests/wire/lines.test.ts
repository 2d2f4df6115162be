import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { LINE_BYTES_MAX } from '../../src/wire/lines.ts';
import type { LinesOptions } from '../../src/wire/lines-options.ts';
import { canSeparate } from '../../src/wire/lines-parser.ts';
import { openSession } from '../../src/wire/session.ts';
import type { BoardPlan, WireSession } from '../../src/wire/types.ts';
import { ascii, LINES, PLAN, WREN } from './boards.ts';
import { frameOf, kinds, pushed, readings, told, written } from './told.ts';

const LEADER: BoardPlan = {
  boardName: null,
  inputs: { channels: [0, 1, 3], names: ['shoulder', 'elbow', 'twist'], samplingMs: 10 },
  outputs: [],
};

function opened(options: Partial<LinesOptions> = {}, plan: BoardPlan = LEADER): WireSession {
  const session = openSession({ name: 'lines', lines: { ...LINES.lines, ...options } }, plan);
  session.open(() => {});
  return session;
}

/** A session past the line that may be cut. */
function listening(options: Partial<LinesOptions> = {}, plan: BoardPlan = LEADER): WireSession {
  const session = opened(options, plan);
  pushed(session, ascii('ut line\n'));
  return session;
}

const say = (session: WireSession, text: string): ReturnType<typeof pushed> => pushed(session, ascii(text));

describe('a line of columns', () => {
  for (const [what, line] of [
    ['commas', '512,300,7,9'],
    ['semicolons', '512;300;7;9'],
    ['tabs', '512\t300\t7\t9'],
    ['spaces', '512 300  7 9'],
    ['commas and spaces', '512, 300 ,7 , 9'],
    ['a comma at its end', '512,300,7,9,'],
    ['signs and decimals', '+512,300.0,7,9.000'],
    ['more columns than asked for', '512,300,7,9,11,12'],
    ['blanks around it', '  512,300,7,9 \t'],
  ] as const) {
    it(`is read with ${what}`, () => {
      for (const end of ['\n', '\r\n']) {
        expect(readings(say(listening(), line + end))).toEqual([[512, 300, 9]]);
      }
    });
  }

  it('has no value where a column is empty, and no other column moves there', () => {
    const session = listening();
    say(session, '1,2,3,4\n');
    expect(readings(say(session, '512,,7,9\n'))).toEqual([[512, Number.NaN, 9]]);
    expect(readings(say(session, ',300,7,9\n'))).toEqual([[Number.NaN, 300, 9]]);
  });

  it('has no value where it is too short', () => {
    const session = listening();
    say(session, '1,2,3,4\n');
    expect(readings(say(session, '512,300\n'))).toEqual([[512, 300, Number.NaN]]);
  });

  it('is read by the given separator alone', () => {
    const session = listening({ separator: '|' });
    expect(readings(say(session, '512| 300 |7|9\n'))).toEqual([[512, 300, 9]]);
    expect(say(session, '512 300 7 9\n')).toEqual([{ kind: 'garbled', bytes: 12, why: 'syntax' }]);
  });

  it('keeps empty columns between tabs, when tabs are what splits it', () => {
    const session = listening({ separator: '\t' });
    say(session, '1\t2\t3\t4\n');
    expect(readings(say(session, '512\t\t7\t9\n'))).toEqual([[512, Number.NaN, 9]]);
  });

  it('takes a run of spaces for one, when spaces are what splits it', () => {
    expect(readings(say(listening({ separator: ' ' }), '512  300 7   9\n'))).toEqual([[512, 300, 9]]);
  });

  it('gives the number that JavaScript reads in the same text', () => {
    const session = listening({}, { ...LEADER, inputs: { channels: [0], names: ['shoulder'], samplingMs: 10 } });
    const decimal = fc
      .tuple(fc.constantFrom('', '-', '+'), fc.integer({ min: 0, max: 999_999 }), fc.integer({ min: 0, max: 9_999 }))
      .map(([sign, whole, part]) => `${sign}${whole}.${String(part).padStart(4, '0')}`);
    fc.assert(
      fc.property(decimal, (text) => {
        // -0 and 0 are one count.
        expect(readings(say(session, `${text}\n`))[0]?.[0]).toBeCloseTo(Number(text), 12);
      }),
    );
  });

  it('gives a finite number, however many digits it has', () => {
    const session = listening({}, { ...LEADER, inputs: { channels: [0], names: ['shoulder'], samplingMs: 10 } });
    for (const text of ['9'.repeat(250), `1.${'9'.repeat(240)}`, `0.${'0'.repeat(240)}1`]) {
      const [[count]] = readings(say(session, `${text}\n`)) as [[number]];
      expect(Number.isFinite(count)).toBe(true);
      expect(Math.abs(count / Number(text) - 1) < 1e-12 || count === 0).toBe(true);
    }
  });
});

describe('a line of names', () => {
  for (const [what, line] of [
    ['in any order', 'twist:9,shoulder:512,elbow:300'],
    ['as the Arduino plotter wants them', 'shoulder: 512\telbow: 300\ttwist: 9'],
    ['among others', 'shoulder:512 temperature:21.5 elbow:300 twist:9'],
  ] as const) {
    it(`is read ${what}`, () => {
      expect(readings(say(listening(), `${line}\n`))).toEqual([[512, 300, 9]]);
    });
  }

  it('has no value for a name it leaves out', () => {
    const session = listening();
    say(session, '1,2,3,4\n');
    expect(readings(say(session, 'elbow:300\n'))).toEqual([[Number.NaN, 300, Number.NaN]]);
  });

  it('takes no name for another that begins like it', () => {
    const session = listening();
    say(session, '1,2,3,4\n');
    expect(readings(say(session, 'elbow:300,elbows:5,elbo:6\n'))).toEqual([[Number.NaN, 300, Number.NaN]]);
  });

  it('is no reading when no name is wanted', () => {
    const session = listening();
    say(session, '1,2,3,4\n');
    expect(say(session, 'temperature:21\n')).toEqual([]);
  });

  it('cannot be mixed with columns', () => {
    const session = listening();
    say(session, '1,2,3,4\n');
    expect(kinds(say(session, '512,elbow:300\nelbow:300,512\n'))).toEqual(['garbled', 'garbled']);
  });
});

describe('a leader board that speaks on change', () => {
  const listens = (): WireSession => listening({ sends: 'on_change' });

  it('keeps what it does not repeat', () => {
    const session = listens();
    say(session, 'shoulder:512,elbow:300,twist:9\n');
    expect(readings(say(session, 'elbow:301\n512,,,10\n'))).toEqual([
      [512, 301, 9],
      [512, 301, 10],
    ]);
  });

  it('is ready though it is still, and has no value for what never moved', () => {
    const session = opened({ sends: 'on_change' });
    expect(told((emit) => session.nudge(emit))).toEqual([{ kind: 'ready', board: null }]);
    expect(readings(say(session, 'cut\nelbow:301\n'))).toEqual([[Number.NaN, 301, Number.NaN]]);
  });

  it('keeps nothing of a bad line', () => {
    const session = listens();
    say(session, 'shoulder:512,elbow:300,twist:9\nshoulder:1,elbow:x\n');
    expect(readings(say(session, 'twist:8\n'))).toEqual([[512, 300, 8]]);
  });
});

describe('the greeting of a lines board', () => {
  it('is its first whole reading, and a boot banner before it is no fault', () => {
    const session = opened();
    const events = say(session, 'ets Jul 29 2019\nrst:0x1,boot:0x13\nv 2\n1.5\nReady!\n512,300,7,9\n');
    expect(kinds(events)).toEqual(['ready', 'reading']);
  });

  it('is never a line whose beginning may have been lost', () => {
    const session = opened();
    expect(say(session, '12,300,7,9\n')).toEqual([]);
    expect(readings(say(session, '512,300,7,9\n'))).toEqual([[512, 300, 9]]);
  });

  it('is waited for, however often a leader is nudged', () => {
    const session = opened();
    for (let nudge = 0; nudge < 5; nudge++) expect(told((emit) => session.nudge(emit))).toEqual([]);
  });

  it('is the first word of a board with followers only, even a cut one', () => {
    const session = opened({}, { ...PLAN, inputs: null });
    expect(say(session, 'ady\r\n')).toEqual([{ kind: 'ready', board: null }]);
    expect(say(session, 'ok\r\nok\r\n')).toEqual([]);
  });

  it('is not waited for past the first nudge, with followers only', () => {
    const session = opened({}, { ...PLAN, inputs: null });
    expect(told((emit) => session.nudge(emit))).toEqual([{ kind: 'ready', board: null }]);
    expect(told((emit) => session.nudge(emit))).toEqual([]);
  });

  it('may name the board, in its very first line', () => {
    const session = opened({}, { ...PLAN, inputs: null, boardName: 'wren-2' });
    expect(say(session, 'board: wren-2\r\n')).toEqual([{ kind: 'ready', board: 'wren-2' }]);
  });

  it('may do without a name even where the profile gives one', () => {
    const session = opened({}, { ...LEADER, boardName: 'handstick' });
    expect(kinds(say(session, 'x\n1,2,3,4\n'))).toEqual(['ready', 'reading']);
  });

  it('stops being valid when the board then says another name', () => {
    const session = opened({}, { ...LEADER, boardName: 'handstick' });
    expect(kinds(say(session, 'x\n1,2,3,4\nboard: heron\n1,2,3,4\n'))).toEqual(['ready', 'reading', 'stranger']);
  });

  it('said again means that the board has started again', () => {
    const session = opened({}, { ...PLAN, inputs: null });
    say(session, 'board: wren\n');
    expect(kinds(say(session, 'board: wren\n'))).toEqual(['reboot', 'ready']);
  });
});

describe('a bad line', () => {
  const running = (options: Partial<LinesOptions> = {}): WireSession => {
    const session = listening(options);
    say(session, '1,2,3,4\n');
    return session;
  };

  for (const line of [
    'hello',
    '512,300,x,9',
    '512,300,7,9,x',
    '5-12,300',
    '--5',
    '1.2.3',
    '512:',
    ':5',
    '.',
    '512*30',
    '5,é',
  ]) {
    it(`is told, and is no reading: ${line}`, () => {
      expect(say(running(), `${line}\n`)).toEqual([{ kind: 'garbled', bytes: ascii(line).length + 1, why: 'syntax' }]);
    });
  }

  it('is not an empty one', () => {
    expect(say(running(), '\n\r\n  \n')).toEqual([]);
  });

  it('is told once it is too long, and the next one is read', () => {
    const session = running();
    const events = say(session, `${'1,'.repeat(200)}\n512,300,7,9\n`);
    expect(events.slice(0, 2)).toEqual([
      { kind: 'garbled', bytes: LINE_BYTES_MAX, why: 'oversize' },
      { kind: 'garbled', bytes: 401 - LINE_BYTES_MAX, why: 'oversize' },
    ]);
    expect(readings(events)).toEqual([[512, 300, 9]]);
  });

  it('is not one of exactly the longest length', () => {
    const line = `512,300,7,9,${'1'.repeat(LINE_BYTES_MAX - 12)}`;
    expect(readings(say(running(), `${line}\n`))).toEqual([[512, 300, 9]]);
  });
});

describe('a checksum', () => {
  // "512,300,7,9": xor 0x27 and sum 0x21f, added up by hand over 35 31 32 2c 33 30 30 2c 37 2c 39.
  it('of exclusive or is checked', () => {
    const session = listening({ checksum: 'xor' });
    expect(readings(say(session, '512,300,7,9*27\r\n'))).toHaveLength(1);
    expect(say(session, '512,301,7,9*27\n')).toEqual([{ kind: 'garbled', bytes: 15, why: 'checksum' }]);
  });

  it('of the sum is checked', () => {
    const session = listening({ checksum: 'sum' });
    expect(readings(say(session, '512,300,7,9*1F\n512,300,7,9*1f\n'))).toEqual([
      [512, 300, 9],
      [512, 300, 9],
    ]);
    expect(kinds(say(session, '512,300,7,9*20\n'))).toEqual(['garbled']);
  });

  it('is missed where it is absent or no number', () => {
    const session = listening({ checksum: 'xor' });
    say(session, '512,300,7,9*27\n');
    const events = say(session, '512,300,7,9\n512,300,7,9*\n512,300,7,9*G0\n*00\n');
    expect(events.map((event) => (event.kind === 'garbled' ? event.why : event.kind))).toEqual([
      'checksum',
      'checksum',
      'checksum',
      // Nothing at all, rightly summed up.
      'syntax',
    ]);
  });
});

describe('a separator', () => {
  it('is one character that no number, name or checksum holds', () => {
    const able = [',', ';', '\t', ' ', '|', '/', '#'];
    const unable = ['', ', ', '5', '-', '+', '.', ':', '*', 'a', '\n', 'é', '_'];
    expect([...able, ...unable].filter(canSeparate)).toEqual(able);
  });
});

describe('a follower on lines', () => {
  it('is sent its own texts', () => {
    const session = opened({}, PLAN);
    expect(written(session, 0, (out) => session.limp(0, out))).toEqual([...ascii('X\n')]);
    expect(written(session, 0, (out) => session.power(0, true, out))).toEqual([...ascii('P1\n')]);
    expect(written(session, 0, (out) => session.power(0, false, out))).toEqual([...ascii('P0\n')]);
  });

  it('is sent nothing where its profile has no text for it', () => {
    const session = opened({ template: null, limp: null, powerOn: null, powerOff: null }, PLAN);
    const out = new Uint8Array(8);
    expect([
      session.frameBytesMax(0),
      session.encode(0, frameOf([1500, 1500, 1500]), out),
      session.limp(0, out),
      session.power(0, true, out),
      session.power(0, false, out),
      session.echo(1, out),
    ]).toEqual([0, 0, 0, 0, 0, 0]);
  });

  it('has texts of its own where several share a board', () => {
    const heron = {
      ...WREN,
      lines: { template: 'H{shoulder.us} {elbow.us} {twist.us}\n', limp: 'HX\n', powerOn: null, powerOff: null },
    };
    const session = opened({}, { ...PLAN, outputs: [WREN, heron] });
    const frame = frameOf([1500, 1000, 2000]);
    const text = (output: number): string =>
      Buffer.from(written(session, output, (out) => session.encode(output, frame, out))).toString();
    expect([text(0), text(1)]).toEqual(['1500,1000,2000.00\n', 'H1500 1000 2000\n']);
  });

  it('is refused a session when its template was not checked', () => {
    expect(() => opened({ template: '{nose.us}\n' }, PLAN)).toThrow('nose');
  });
});
