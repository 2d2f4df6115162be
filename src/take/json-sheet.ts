import type { MakeSheet } from './sheet.ts';

const PORTION_CHARACTERS = 64 * 1024;

/** One JSON object a line; null where nothing is known. Numbers in their shortest form that reads back the same. */
export const jsonSheet: MakeSheet = (columns, withTake, write) => {
  const encoder = new TextEncoder();
  const keys = columns.map(({ name }, i) => `${i > 0 || withTake ? ',' : ''}${JSON.stringify(name)}:`);
  let text = '';
  const flush = (): void => {
    if (text !== '') write(encoder.encode(text));
    text = '';
  };
  return {
    add(take, row) {
      text += withTake ? `{"take":${JSON.stringify(take)}` : '{';
      for (const [i, column] of columns.entries()) {
        const value = column.of(row);
        const isText = typeof value === 'string';
        text += `${keys[i]}${isText ? JSON.stringify(value) : Number.isFinite(value) ? value : 'null'}`;
      }
      text += '}\n';
      if (text.length > PORTION_CHARACTERS) flush();
    },
    end: flush,
  };
};
