import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parse } from 'yaml';
import { editYaml } from '../../src/rig/edit.ts';
import type { Edit, EditPath } from '../../src/rig/edit.ts';
import { flowText } from '../../src/rig/flow-text.ts';
import type { PlainValue } from '../../src/rig/flow-text.ts';

const set = (text: string, path: EditPath, value: PlainValue): unknown => editYaml(text, [{ path, value }]);

describe('an edit', () => {
  it.each<[string, string, EditPath, PlainValue, string]>([
    ['a number', 'a: 1   # one\nb: 2\n', ['a'], 10.5, 'a: 10.5   # one\nb: 2\n'],
    ['a word in quotes', "a: 'x'  # x\n", ['a'], 'left wing', 'a: "left wing"  # x\n'],
    ['a number in a list', 'a: [1,  2 , 3] # abc\n', ['a', 1], -7, 'a: [1,  -7 , 3] # abc\n'],
    [
      'nothing else than what differs',
      'a: [ [1.0, 2], [3,4] ]\n',
      ['a'],
      [
        [1, 2],
        [3, 5],
      ],
      'a: [ [1.0, 2], [3,5] ]\n',
    ],
    [
      'a list of another length',
      'a:   # points\n  - 1 # one\n  - 2 # two\nb: 3\n',
      ['a'],
      [1, 2, 3],
      'a:   # points\n  [1, 2, 3] # two\nb: 3\n',
    ],
    [
      'a key on a line of its own',
      'top:\n  a: 1 # one\n  # end\nnext: 2\n',
      ['top', 'b'],
      [0, 0, -5],
      'top:\n  a: 1 # one\n  b: [0, 0, -5]\n  # end\nnext: 2\n',
    ],
    [
      'a key in a list entry',
      '- a: 1\n  c: { d: 2 } # d\n- a: 3\n',
      [0, 'b'],
      4,
      '- a: 1\n  c: { d: 2 } # d\n  b: 4\n- a: 3\n',
    ],
    [
      'a key on the same line',
      'a: { b: 1, c: [2] } # c\n',
      ['a', 'd'],
      { e: 3, f: [0, 1] },
      'a: { b: 1, c: [2], d: { e: 3, f: [0, 1] } } # c\n',
    ],
    [
      'a key before a comma that ends nothing',
      'a: { b: 1,\n     # b\n   }\n',
      ['a', 'd'],
      true,
      'a: { b: 1, d: true,\n     # b\n   }\n',
    ],
    ['a key in an empty map', 'a: {}\n', ['a', 'b', 'c'], 1, 'a: { b: { c: 1 } }\n'],
    ['a key that has no value yet', 'a:   # later\nb: 1\n', ['a', 'c'], 1, 'a: { c: 1 }   # later\nb: 1\n'],
    ['a key that stands alone', 'a: { b }\n', ['a', 'b'], 1, 'a: { b: 1 }\n'],
    ['what is empty', 'a: ~ # none\n', ['a'], [1], 'a: [1] # none\n'],
    [
      'a key after a text of several lines',
      'a:\n  b: |\n    one\n    two\nc: 1\n',
      ['a', 'd'],
      2,
      'a:\n  b: |\n    one\n    two\n  d: 2\nc: 1\n',
    ],
    ['a text of several lines', 'a: |\n  one\n  two\nb: 1\n', ['a'], 'x', 'a: x\nb: 1\n'],
    ['a file without a line end', 'a: 1', ['b'], 2, 'a: 1\nb: 2'],
    [
      'lines as another system ends them',
      'a:\r\n  b: 1 # b\r\nc: 2\r\n',
      ['a', 'd'],
      3,
      'a:\r\n  b: 1 # b\r\n  d: 3\r\nc: 2\r\n',
    ],
    [
      'a map key by key',
      'w: { mass_g: 1500, at_mm: [0, 0, -120] } # w\n',
      ['w'],
      { mass_g: 1400, at_mm: [0, 0, -90] },
      'w: { mass_g: 1400, at_mm: [0, 0, -90] } # w\n',
    ],
  ])('changes %s', (_what, text, path, value, edited) => {
    expect(set(text, path, value)).toBe(edited);
    // The expected texts above are YAML too.
    expect(() => parse(edited)).not.toThrow();
  });

  it('makes several, one after another, or none', () => {
    const edits: readonly Edit[] = [
      { path: ['a', 'b'], value: 1 },
      { path: ['a', 'c'], value: 2 },
    ];
    expect(editYaml('a: {}\n', edits)).toBe('a: { b: 1, c: 2 }\n');
    expect(editYaml('a: { c: [] }\n', [...edits, { path: ['a', 'c', 0], value: 2 }])).toEqual({
      fault: 'no such place',
      path: 'a.c[0]',
    });
  });

  it.each<[string, string, EditPath, string]>([
    ['a text that is no YAML', 'a: [1\n', ['a'], 'not yaml'],
    ['an alias, whose value is written elsewhere', 'a: &x 1\nb: *x\n', ['b'], 'not yaml'],
    ['a list entry that is not there', 'a: [1]\n', ['a', 1], 'no such place'],
    ['a key of a list', 'a: [1]\n', ['a', 'b'], 'no such place'],
    ['a key of a number', 'a: 1\n', ['a', 'b'], 'no such place'],
    ['an entry of a list that is not there', 'a: 1\n', ['b', 0], 'no such place'],
    ['an empty file', '', ['a'], 'no such place'],
    ['a value that a tag makes another', 'a: !!str 1\n', ['a'], 'not plain'],
  ])('leaves %s', (_what, text, path, fault) => {
    expect(set(text, path, 5)).toMatchObject({ fault });
  });
});

/** Values as profiles hold them. */
const word = fc.constantFrom(
  'shoulder',
  'elbow',
  'x',
  'on',
  'true',
  'null',
  '1e3',
  '',
  ' ',
  '# no',
  'a: b',
  '{',
  '"',
  "it's",
  'é\n',
);
const leaf = fc.oneof(
  fc.integer(),
  fc.double({ noNaN: true, noDefaultInfinity: true }).map((x) => (x === 0 ? 0 : x)),
  fc.boolean(),
  word,
);
const value: fc.Arbitrary<PlainValue> = fc.letrec<{ any: PlainValue }>((tie) => ({
  any: fc.oneof(
    { depthSize: 'small', withCrossShrink: true },
    leaf,
    fc.array(tie('any'), { maxLength: 4 }),
    fc.dictionary(fc.constantFrom('a', 'b', 'mass_g', 'at_mm', '0', 'a b'), tie('any'), {
      maxKeys: 4,
      noNullPrototype: true,
    }),
  ),
})).any;

/** Writes a value as people do: blocks and single lines, comments and odd spaces, each chosen by the next number. */
function written(root: PlainValue, choices: readonly number[]): string {
  let at = 0;
  let comments = 0;
  const choice = (of: number): number => (choices[at++ % choices.length] ?? 0) % of;
  const end = (): string => (choice(3) === 0 ? `${' '.repeat(1 + choice(3))}# note ${comments++}\n` : '\n');
  const isBlock = (inner: PlainValue): boolean =>
    typeof inner === 'object' && Object.keys(inner).length > 0 && choice(2) === 0;
  const block = (inner: PlainValue, indent: string): string => {
    if (Array.isArray(inner)) return inner.map((item) => `${indent}-${child(item, indent)}`).join('');
    return Object.entries(inner as object)
      .map(([key, one]) => `${indent}${flowText(key)}:${child(one as PlainValue, indent)}`)
      .join('');
  };
  const child = (inner: PlainValue, indent: string): string => {
    if (!isBlock(inner)) return `${' '.repeat(1 + choice(2))}${flowText(inner)}${end()}`;
    const deeper = `${indent}${' '.repeat(1 + choice(3))}`;
    const note = choice(4) === 0 ? `${deeper}# note ${comments++}\n` : '';
    return `${end()}${note}${block(inner, deeper)}`;
  };
  return `# head\n${block({ root }, '')}tail: 1 # tail\n`;
}

const commentsOf = (text: string): readonly string[] => text.match(/# (?:note \d+|head|tail)/g) ?? [];

/** Every place in a value. */
function places(inner: PlainValue, path: EditPath): readonly EditPath[] {
  if (typeof inner !== 'object') return [path];
  const children = Array.isArray(inner) ? inner.map((one, i) => [i, one] as const) : Object.entries(inner as object);
  return [path, ...children.flatMap(([step, one]) => places(one as PlainValue, [...path, step]))];
}

function at(root: unknown, path: EditPath): unknown {
  return path.reduce<unknown>((so, step) => (so as Record<string, unknown>)[step], root);
}

const choices = fc.array(fc.nat(11), { minLength: 1, maxLength: 40 });

describe('whatever is edited', () => {
  it('writes a zero without its sign', () => {
    expect(set('a: 1\n', ['a'], -0)).toBe('a: 0\n');
  });

  it('reads as it should, and all around it stays as it was to the byte', () => {
    fc.assert(
      fc.property(value, choices, fc.nat(), leaf, (root, style, where, next) => {
        const text = written(root, style);
        const all = places(root, ['root']);
        const path = all[where % all.length] as EditPath;
        const old = at({ root }, path);
        const edited = set(text, path, next);
        expect(edited).toBeTypeOf('string');
        const whole = parse(edited as string) as unknown;
        expect(at(whole, path)).toBe(next);
        expect(at(whole, ['tail'])).toBe(1);
        // Everything else reads as before: put the old value back.
        const back = at(whole, path.slice(0, -1)) as Record<string | number, unknown>;
        back[path.at(-1) as string] = old;
        expect(whole).toEqual({ root: parse(flowText(root)), tail: 1 });
        if (typeof old === 'object') return;
        // One passage changed, and it was the old value.
        const gone = passage(text, edited as string);
        expect(flowText(old as PlainValue)).toContain(gone);
        expect(commentsOf(edited as string)).toEqual(commentsOf(text));
      }),
      { numRuns: 300 },
    );
  });

  it('gains a key in the manner of its map, and loses nothing', () => {
    fc.assert(
      fc.property(value, choices, fc.nat(), value, (root, style, where, next) => {
        const text = written(root, style);
        const maps = places(root, ['root']).filter((path) => {
          const found = at({ root }, path);
          return typeof found === 'object' && !Array.isArray(found);
        });
        const path = [...(maps[where % Math.max(1, maps.length)] ?? []), 'added'];
        const edited = set(text, path, next);
        expect(edited).toBeTypeOf('string');
        expect(at(parse(edited as string), path)).toEqual(parse(flowText(next)));
        expect(passage(text, edited as string)).toBe('');
        expect(commentsOf(edited as string)).toEqual(commentsOf(text));
      }),
      { numRuns: 300 },
    );
  });

  it('stays as it is when the value is there already', () => {
    fc.assert(
      fc.property(value, choices, (root, style) => {
        const text = written(root, style);
        expect(set(text, ['root'], root)).toBe(text);
      }),
    );
  });
});

/** What is gone of a text between what still begins and what still ends it. */
function passage(before: string, after: string): string {
  const most = Math.min(before.length, after.length);
  let head = 0;
  while (head < most && before[head] === after[head]) head++;
  let tail = 0;
  while (tail < most - head && before.at(-1 - tail) === after.at(-1 - tail)) tail++;
  return before.slice(head, before.length - tail);
}
