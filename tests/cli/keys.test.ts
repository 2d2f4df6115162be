import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { type Action, BINDINGS, keyReader } from '../../src/cli/keys.ts';

const read = (...pieces: string[]): readonly Action[] => {
  const reader = keyReader(3);
  return pieces.flatMap((piece) => reader(piece));
};
const ask = (key: string) => ({ kind: 'ask', key });

describe('The keys', () => {
  it('are bound once each, and never to a digit but for all', () => {
    const bytes = BINDINGS.flatMap((binding) => binding.bytes);
    expect(new Set(bytes).size).toBe(bytes.length);
    expect(bytes.filter((byte) => /[1-9]/.test(byte))).toEqual([]);
  });

  it('ask for what they are labelled with', () => {
    expect(read('gjhpl rc')).toEqual(['go', 'join', 'hold', 'park', 'limp', 'stop', 'rearm', 'clutch'].map(ask));
    expect(read('-+0?q')).toEqual([
      { kind: 'pace', step: -1 },
      { kind: 'pace', step: 1 },
      { kind: 'select_all' },
      { kind: 'help' },
      { kind: 'quit' },
    ]);
  });

  it('count in either case, because nobody looks at Caps Lock in a fright', () => {
    expect(read('HQ')).toEqual([ask('hold'), { kind: 'quit' }]);
  });

  it('select the followers there are, and no more', () => {
    expect(read('1394')).toEqual([
      { kind: 'select', follower: 0 },
      { kind: 'select', follower: 2 },
    ]);
  });

  it('hear Ctrl-C', () => {
    expect(read('\x03')).toEqual([{ kind: 'interrupt' }]);
  });
});

describe('Keys that are not bound', () => {
  // Names from xterm's control sequences; their last letters are keys of ours.
  it.each([
    ['up', '\x1b[A'],
    ['right, which ends in C', '\x1b[C'],
    ['home', '\x1b[H'],
    ['F1', '\x1bOP'],
    ['F5', '\x1b[15~'],
    ['Ctrl-left', '\x1b[1;5D'],
    ['a mouse report', '\x1b[<0;10;20M'],
  ])('%s asks for nothing', (_, bytes) => {
    expect(read(bytes)).toEqual([]);
    expect(read(`${bytes}h`)).toEqual([ask('hold')]);
  });

  it('ask for nothing wherever their sequence is cut', () => {
    const sequences = fc.constantFrom(
      '\x1b[A',
      '\x1b[C',
      '\x1b[H',
      '\x1bOP',
      '\x1b[15~',
      '\x1b[1;5D',
      '\x1b[200~jgp\x1b[201~',
    );
    fc.assert(
      fc.property(
        fc.array(sequences, { maxLength: 5 }),
        fc.infiniteStream(fc.integer({ min: 1, max: 4 })),
        (list, cuts) => {
          let rest = list.join('');
          const pieces: string[] = [];
          while (rest !== '') {
            const length = cuts.next().value as number;
            pieces.push(rest.slice(0, length));
            rest = rest.slice(length);
          }
          expect(read(...pieces).filter(({ kind }) => kind !== 'back')).toEqual([]);
        },
      ),
    );
  });

  it('never swallow a stop that follows them', () => {
    expect(read('\x1b', ' ')).toEqual([{ kind: 'back' }, ask('stop')]);
    expect(read('\x1b ')).toEqual([{ kind: 'back' }, ask('stop')]);
    expect(read('\x1b\x1b ')).toContainEqual(ask('stop'));
  });

  it('do not hold the keyboard for ever: an endless sequence is given up', () => {
    expect(read(`\x1b[${';'.repeat(100)}`, 'h')).toContainEqual(ask('hold'));
  });
});

describe('Pasted text', () => {
  it('moves nothing', () => {
    expect(read('\x1b[200~go join park \x1b[201~h')).toEqual([ask('hold')]);
  });

  it('moves nothing in whatever pieces it comes', () => {
    expect(read('\x1b[20', '0~go jo', 'in\x1b[2', '01~', 'h')).toEqual([ask('hold')]);
  });

  it('that never ends lets Ctrl-C through', () => {
    expect(read('\x1b[200~go', '\x03')).toEqual([{ kind: 'interrupt' }]);
  });
});
