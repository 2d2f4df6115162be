import { describe, expect, it } from 'vitest';
import { plain } from '../../src/rig/located.ts';
import type { LocatedNode } from '../../src/rig/located.ts';
import { mergePatch } from '../../src/rig/merge-patch.ts';
import { mistakeList } from '../../src/rig/mistake.ts';
import { readYaml } from '../../src/rig/yaml-source.ts';

/** P. Hoffman and J. Snell, RFC 7396, JSON Merge Patch (2014), Appendix A: target, patch, result. */
const APPENDIX_A = [
  ['{"a":"b"}', '{"a":"c"}', '{"a":"c"}'],
  ['{"a":"b"}', '{"b":"c"}', '{"a":"b","b":"c"}'],
  ['{"a":"b"}', '{"a":null}', '{}'],
  ['{"a":"b","b":"c"}', '{"a":null}', '{"b":"c"}'],
  ['{"a":["b"]}', '{"a":"c"}', '{"a":"c"}'],
  ['{"a":"c"}', '{"a":["b"]}', '{"a":["b"]}'],
  ['{"a":{"b":"c"}}', '{"a":{"b":"d","c":null}}', '{"a":{"b":"d"}}'],
  ['{"a":[{"b":"c"}]}', '{"a":[1]}', '{"a":[1]}'],
  ['["a","b"]', '["c","d"]', '["c","d"]'],
  ['{"a":"b"}', '["c"]', '["c"]'],
  ['{"a":"foo"}', 'null', 'null'],
  ['{"a":"foo"}', '"bar"', '"bar"'],
  ['{"e":null}', '{"a":1}', '{"e":null,"a":1}'],
  ['[1,2]', '{"a":"b","c":null}', '{"a":"b"}'],
  ['{}', '{"a":{"bb":{"ccc":null}}}', '{"a":{"bb":{}}}'],
] as const;

function tree(text: string, file = 'f.yaml'): LocatedNode {
  const node = readYaml(file, text, mistakeList());
  if (node === null) throw new Error(`${text} is not YAML`);
  return node;
}

describe('a merge patch', () => {
  it.each(APPENDIX_A)('of %s with %s is %s', (target, patch, result) => {
    expect(JSON.parse(JSON.stringify(plain(mergePatch(tree(target), tree(patch)))))).toEqual(JSON.parse(result));
  });

  it('leaves every value with its own place', () => {
    const merged = mergePatch(tree('a: 1\nb: { c: 2, d: 3 }\n', 'base.yaml'), tree('\nb: { c: 4 }\n', 'over.yaml'));
    const b = merged.kind === 'map' ? merged.entries.get('b')?.value : undefined;
    const places =
      b?.kind === 'map' ? [...b.entries].map(([key, { value }]) => [key, value.place.file, value.place.line]) : [];
    expect(places).toEqual([
      ['c', 'over.yaml', 2],
      ['d', 'base.yaml', 2],
    ]);
  });
});
