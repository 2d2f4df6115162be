import { loadRig, type LoadedRig } from '../rig/load.ts';
import { mistakeLine } from '../rig/mistake.ts';

/** A rig from its file, or null when it has mistakes: they have then been said. */
export function rigOrMistakes(file: string, say: (text: string) => void): LoadedRig | null {
  const loaded = loadRig(file);
  if (!('mistakes' in loaded)) return loaded;
  say(loaded.mistakes.map((mistake) => `${mistakeLine(mistake)}\n`).join(''));
  return null;
}
