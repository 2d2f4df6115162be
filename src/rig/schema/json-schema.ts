import { z } from 'zod';
import type { LocatedNode } from '../located.ts';
import { follower } from './follower.ts';
import { leader } from './leader.ts';
import { followerOver, leaderOver, rig } from './rig.ts';

export const FILE_KINDS = ['rig', 'leader', 'follower'] as const;
export type FileKind = (typeof FILE_KINDS)[number];

/** As much of JSON Schema (2020-12) as these files need. */
export interface JsonSchema {
  readonly $schema?: string;
  readonly type?: string;
  readonly description?: string;
  readonly default?: unknown;
  readonly properties?: Readonly<Record<string, JsonSchema>>;
  readonly required?: readonly string[];
  readonly additionalProperties?: JsonSchema | boolean;
  readonly items?: JsonSchema | boolean;
  readonly prefixItems?: readonly JsonSchema[];
  readonly anyOf?: readonly JsonSchema[];
}

/** JSON Schema of a rig, leader or follower file, for editors. */
export function jsonSchema(kind: FileKind): JsonSchema {
  if (kind === 'rig') {
    const whole = schemaOf(rig);
    const { leader: lead, followers } = whole.properties as Record<'leader' | 'followers', JsonSchema>;
    const items = followers.items as JsonSchema;
    return {
      ...whole,
      properties: {
        ...whole.properties,
        leader: withRelaxed(lead),
        followers: { ...followers, items: withRelaxed(items) },
      },
    };
  }
  const { $schema, ...whole } = schemaOf(kind === 'leader' ? leader : follower);
  const over = relaxed(schemaOf(kind === 'leader' ? leaderOver : followerOver));
  return { ...($schema === undefined ? {} : { $schema }), anyOf: [whole, withoutDialect(over)] };
}

/** JSON Schema of what may be written, before defaults are filled in. */
export function schemaOf(schema: z.ZodType): JsonSchema {
  return z.toJSONSchema(schema, { io: 'input' }) as JsonSchema;
}

/** The last choice of a profile's place is the one with `like`, whose maps are only laid over other maps. */
function withRelaxed(choice: JsonSchema): JsonSchema {
  const choices = choice.anyOf ?? [];
  return { ...choice, anyOf: choices.map((one, i) => (i === choices.length - 1 ? relaxed(one) : one)) };
}

function relaxed(schema: JsonSchema): JsonSchema {
  if (schema.properties === undefined) return schema;
  const { required, ...rest } = schema;
  const properties = Object.fromEntries(Object.entries(schema.properties).map(([key, value]) => [key, relaxed(value)]));
  return { ...rest, properties, ...(required?.includes('like') === true ? { required: ['like'] } : {}) };
}

function withoutDialect(schema: JsonSchema): JsonSchema {
  const { $schema: _, ...rest } = schema;
  return rest;
}

/** The schema of a key or list entry; of several choices, the one that has the value's form. */
export function childSchema(schema: JsonSchema, value: LocatedNode | null, step: PropertyKey): JsonSchema {
  const child = typeof step === 'number' ? itemSchema(schema, step) : keySchema(schema, String(step));
  const form = value === null ? null : FORMS[value.kind];
  const chosen = child.anyOf?.find((choice) => choice.type === form);
  return chosen === undefined ? child : { ...child, ...chosen };
}

const FORMS = { map: 'object', list: 'array', scalar: 'string' } as const;

function itemSchema(schema: JsonSchema, index: number): JsonSchema {
  const item = schema.prefixItems?.[index] ?? schema.items;
  return typeof item === 'object' ? item : {};
}

function keySchema(schema: JsonSchema, key: string): JsonSchema {
  const own =
    schema.properties !== undefined && Object.hasOwn(schema.properties, key) ? schema.properties[key] : undefined;
  if (own !== undefined) return own;
  return typeof schema.additionalProperties === 'object' ? schema.additionalProperties : {};
}
