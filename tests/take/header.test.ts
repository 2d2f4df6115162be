import { describe, expect, it } from 'vitest';
import { headerFrom, headerMetadata, type Made } from '../../src/take/header.ts';
import { headerOf, TWO_ARMS } from './studio.ts';

/** What is read of a header whose text has been changed. */
function reread(made: Made, change: (text: string) => string = (text) => text): ReturnType<typeof headerFrom> {
  const metadata = headerMetadata(headerOf(TWO_ARMS, 0, made), null);
  return headerFrom(new Map([...metadata].map(([key, text]) => [key, change(text)])));
}

const MADE: Made = { by: 'trim', parents: [{ take: 'bow', rows: 7 }], how: { from: '1s' }, posed: true };

describe('the header of a take', () => {
  it('is read as it was written', () => {
    expect(reread(MADE)).toEqual(headerOf(TWO_ARMS, 0, MADE));
  });

  it.each([
    ['record', false],
    ['trim', false],
    ['layer', true],
    ['splice', true],
    ['smooth', true],
  ] as const)('of a take made by %s before it was told whether poses or counts count, tells it', (by, posed) => {
    const read = reread({ ...MADE, by, posed: !posed }, (text) => text.replace(/,"posed":(true|false)/, ''));
    expect(read).toEqual(headerOf(TWO_ARMS, 0, { ...MADE, by, posed }));
  });

  it('that is damaged, of a newer version or of nobody is no header', () => {
    expect(reread(MADE, (text) => text.replace('"by":"trim"', '"by":"magic"'))).toBe('foreign');
    expect(reread(MADE, (text) => (text === '1' ? '2' : text))).toBe('newer');
    expect(headerFrom(new Map())).toBe('foreign');
  });
});
