/** What a file can hold, empty values apart. */
export type PlainValue = string | number | boolean | readonly PlainValue[] | { readonly [key: string]: PlainValue };

/** Words that stand for themselves: nothing else that begins with a letter is a number, a truth or nothing in YAML 1.2. */
const WORD = /^(?!(?:true|false|null)$)[a-z][a-z0-9_-]*$/;

/** A value in one line of YAML, as it may stand anywhere: `{ mass_g: 1500, at_mm: [0, 0, -120] }`. */
export function flowText(value: PlainValue): string {
  switch (typeof value) {
    case 'number':
      if (!Number.isFinite(value)) throw new RangeError(`${value} cannot stand in a file`);
      return String(value === 0 ? 0 : value);
    case 'string':
      // YAML reads JSON's quoted text as it is.
      return WORD.test(value) ? value : JSON.stringify(value);
    case 'boolean':
      return String(value);
    default:
      return isList(value) ? listText(value) : mapText(value);
  }
}

export function isList(value: unknown): value is readonly PlainValue[] {
  return Array.isArray(value);
}

function listText(list: readonly PlainValue[]): string {
  return `[${list.map(flowText).join(', ')}]`;
}

function mapText(map: { readonly [key: string]: PlainValue }): string {
  const entries = Object.entries(map).map(([key, value]) => `${flowText(key)}: ${flowText(value)}`);
  return entries.length === 0 ? '{}' : `{ ${entries.join(', ')} }`;
}
