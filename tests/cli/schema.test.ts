import { describe, expect, it } from 'vitest';
import { schemaCommand } from '../../src/cli/schema.ts';
import { FILE_KINDS, jsonSchema } from '../../src/rig/schema/json-schema.ts';

describe('eidograph schema', () => {
  it.each(FILE_KINDS)('prints the JSON Schema of a %s file', async (kind) => {
    const out: string[] = [];
    await schemaCommand({ write: (text) => out.push(text) }).parseAsync([kind], { from: 'user' });
    expect(JSON.parse(out.join(''))).toEqual(jsonSchema(kind));
  });
});
