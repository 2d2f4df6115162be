/** Attributes of an element; numbers are written to a hundredth, which on paper is a hundredth of a millimetre. */
type Attributes = Readonly<Record<string, string | number>>;

/** One SVG element; children are elements or text that `escaped` has passed. */
export function element(name: string, attributes: Attributes, ...children: readonly string[]): string {
  const written = Object.entries(attributes).map(([key, value]) => ` ${key}="${attribute(value)}"`);
  const open = `<${name}${written.join('')}`;
  return children.length === 0 ? `${open}/>` : `${open}>${children.join('')}</${name}>`;
}

/** Text as it may stand between tags and in attributes. What XML 1.0 cannot hold at all is left out. */
export function escaped(text: string): string {
  return text
    .replace(/[^\t\n\r\u0020-\uD7FF\uE000-\uFFFD\u{10000}-\u{10FFFF}]/gu, '')
    .replace(/[&<>"']/g, (sign) => `&#${sign.charCodeAt(0)};`);
}

/** A path through points; `close` joins its end to its start. */
export function pathData(points: readonly (readonly [number, number])[], close: boolean): string {
  const steps = points.map(([x, y], i) => `${i === 0 ? 'M' : 'L'}${hundredths(x)} ${hundredths(y)}`);
  return `${steps.join('')}${close ? 'Z' : ''}`;
}

/** A number without the zeros that say nothing. */
export function hundredths(value: number): string {
  const rounded = Math.round(value * 100) / 100;
  return String(rounded === 0 ? 0 : rounded);
}

function attribute(value: string | number): string {
  return typeof value === 'number' ? hundredths(value) : escaped(value);
}
