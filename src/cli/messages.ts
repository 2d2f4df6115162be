import type { Sentence } from '../bridge/words.ts';
import type { Message } from './view/scene.ts';

/** The last things said, oldest first; what is said again at once is counted rather than repeated. */
export interface Messages {
  readonly list: readonly Message[];
  add(sentence: Sentence, atUs: number): void;
}

const KEPT = 50;

export function messages(): Messages {
  const list: Message[] = [];
  return {
    list,
    add({ text, weight }, atUs) {
      const last = list.at(-1);
      if (last?.text === text) list.pop();
      list.push({ text, weight, atUs, times: last?.text === text ? last.times + 1 : 1 });
      if (list.length > KEPT) list.shift();
    },
  };
}
