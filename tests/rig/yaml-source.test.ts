import { describe, expect, it } from 'vitest';
import { nodeAt, plain } from '../../src/rig/located.ts';
import { mistakeLine, mistakeList } from '../../src/rig/mistake.ts';
import { readYaml } from '../../src/rig/yaml-source.ts';
import { edited, linesIn, mistakesIn, RIG, rigIn, STORK } from './memory.ts';

function read(text: string) {
  const mistakes = mistakeList();
  return { node: readYaml('f.yaml', text, mistakes), lines: mistakes.sorted().map(mistakeLine) };
}

describe('the reader of files', () => {
  it.each([
    ['line ends of Windows', RIG.replaceAll('\n', '\r\n')],
    ['a byte order mark', `\uFEFF${RIG}`],
    ['a document start and a directive', `%YAML 1.2\n---\n${RIG}...\n`],
  ])('takes %s', (_what, text) => {
    expect(rigIn({ 'rig.yaml': text, 'stork.yaml': STORK }).rig.name).toBe('yard');
  });

  it('places mistakes the same with either line ends', () => {
    const wrong = edited(STORK, ['rate_hz: 50', 'rate_hz: 0']);
    const both = [wrong, wrong.replaceAll('\n', '\r\n')].map((stork) =>
      linesIn({ 'rig.yaml': RIG, 'stork.yaml': stork }),
    );
    expect(both[0]).toHaveLength(1);
    expect(both[1]).toEqual(both[0]);
  });

  it('reads the key `on` as a word, even where a file claims YAML 1.1', () => {
    const { node } = read('%YAML 1.1\n---\npower: { on: high }\n');
    expect(node === null ? null : nodeAt(node, ['power', 'on'])).toMatchObject({ value: 'high' });
  });

  it('keeps keys that would reach a prototype as plain, unknown keys', () => {
    const { node } = read('__proto__: { polluted: true }\n');
    expect(Object.keys(plain(node as NonNullable<typeof node>) as object)).toEqual(['__proto__']);
    expect(({} as { polluted?: boolean }).polluted).toBeUndefined();
    const stork = `${STORK}__proto__: 3\nconstructor: 4\n`;
    expect(mistakesIn({ 'rig.yaml': RIG, 'stork.yaml': stork }).map(({ code, path }) => [code, path])).toEqual([
      ['RIG_KEY_UNKNOWN', '__proto__'],
      ['RIG_KEY_UNKNOWN', 'constructor'],
    ]);
  });

  it('is not drowned by aliases that stand for aliases', () => {
    const rows = Array.from({ length: 30 }, (_, i) => `a${i + 1}: &a${i + 1} [*a${i}, *a${i}, *a${i}]`);
    const { node, lines } = read(`a0: &a0 [lol]\n${rows.join('\n')}\n`);
    expect(node).not.toBeNull();
    expect(lines).toHaveLength(90);
    expect(lines[0]).toBe(
      'f.yaml:2:10: a1[0]: *a0 is an alias; write the value out, or build on another profile with like:',
    );
  });

  it('is not exhausted by brackets', () => {
    expect(read('['.repeat(100_000)).node).toBeNull();
    const deep = read(`a: ${'['.repeat(40)}${']'.repeat(40)}\n`);
    expect(deep.lines).toEqual([expect.stringContaining('nested more than 24 deep')]);
  });

  it('says at most twenty things about text that is no YAML', () => {
    const { lines } = read(`a: "\n${'b: [ }\n'.repeat(500)}`);
    expect(lines.length).toBeGreaterThan(0);
    expect(lines.length).toBeLessThanOrEqual(20);
  });
});
