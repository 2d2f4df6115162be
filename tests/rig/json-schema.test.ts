import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { parse } from 'yaml';
import { describe, expect, it } from 'vitest';
import { z } from 'zod';
import { FILE_KINDS, jsonSchema } from '../../src/rig/schema/json-schema.ts';
import type { JsonSchema } from '../../src/rig/schema/json-schema.ts';
import { RIG, STORK } from './memory.ts';
import { profileFiles } from './profile-files.ts';

/** Every schema below a schema, with the way of keys to it. */
function below(schema: JsonSchema, path: string): readonly (readonly [string, JsonSchema])[] {
  const children = [
    ...Object.entries(schema.properties ?? {}).map(([key, child]) => [`${path}.${key}`, child] as const),
    ...(schema.anyOf ?? []).map((child, i) => [`${path}|${i}`, child] as const),
    ...(typeof schema.items === 'object' ? [[`${path}[]`, schema.items] as const] : []),
  ];
  return [[path, schema], ...children.flatMap(([way, child]) => below(child, way))];
}

/** Units stand last in a key's name; the text an editor shows says them in words. */
const UNITS: readonly (readonly [RegExp, RegExp])[] = [
  [/hz_per_deg_s$/, /hertz per degree per second/],
  [/(?<!per)_deg_s2$/, /degrees per second squared/],
  [/(?<!per)_deg_s$/, /degrees per second/],
  [/_mm_s$/, /millimetres per second/],
  [/(?<!per)_deg$/, /degrees?/],
  [/(?<!per)_mm$/, /millimetres/],
  [/(?<!per)_g$/, /grams/],
  [/_us$/, /microseconds/],
  [/_ms$/, /milliseconds/],
  [/(?<!per)_hz$/, /hertz/],
  [/_nm$/, /newton metres/],
];

describe.each(FILE_KINDS)('the JSON Schema of a %s file', (kind) => {
  const schema = jsonSchema(kind);

  it('is of the 2020-12 dialect', () => {
    expect(schema.$schema).toBe('https://json-schema.org/draft/2020-12/schema');
  });

  it('tells editors what every key is, with its unit', () => {
    const keys = below(schema, '').filter(([path]) => /\.\w+$/.test(path));
    expect(keys.length).toBeGreaterThan(20);
    for (const [path, { description }] of keys) {
      const [, unit] = UNITS.find(([name]) => name.test(path)) ?? [null, /\S/];
      expect(description, path).toMatch(unit);
    }
  });

  it('knows no other keys', () => {
    const maps = below(schema, '').filter(([, { properties }]) => properties !== undefined);
    expect(maps.map(([path, { additionalProperties }]) => [path, additionalProperties])).toEqual(
      maps.map(([path]) => [path, false]),
    );
  });

  it('takes every profile of its kind', () => {
    const reader = z.fromJSONSchema(schema as Parameters<typeof z.fromJSONSchema>[0]);
    const files = profileFiles().filter((file) => kindByFolder(file) === kind);
    expect(files.length).toBeGreaterThan(0);
    for (const file of files) {
      const result = reader.safeParse(parse(readFileSync(join('profiles', file), 'utf8')));
      expect(result.error?.issues ?? [], file).toEqual([]);
    }
  });
});

describe('the JSON Schema', () => {
  const reader = (kind: (typeof FILE_KINDS)[number]) =>
    z.fromJSONSchema(jsonSchema(kind) as Parameters<typeof z.fromJSONSchema>[0]);

  it('refuses what the program refuses by shape', () => {
    expect(reader('follower').safeParse(parse(STORK)).success).toBe(true);
    expect(reader('follower').safeParse(parse(STORK.replace('rate_hz: 50', 'rate: 50'))).success).toBe(false);
    expect(reader('follower').safeParse(parse(STORK.replace('port:', 'wake:'))).success).toBe(false);
  });

  it('takes profiles that build on others, with as few keys as they like', () => {
    expect(reader('follower').safeParse({ like: 'a.yaml', arm: { payload: { mass_g: 3 } } }).success).toBe(true);
    expect(reader('rig').safeParse({ ...parse(RIG), followers: [{ like: 'a.yaml', port: 'sim:arm' }] }).success).toBe(
      true,
    );
    expect(reader('rig').safeParse({ ...parse(RIG), followers: [{ port: 'sim:arm' }] }).success).toBe(false);
  });
});

function kindByFolder(file: string): string {
  if (file.startsWith('leaders')) return 'leader';
  return file.startsWith('followers') ? 'follower' : 'rig';
}
