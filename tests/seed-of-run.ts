import { randomInt } from 'node:crypto';

/** fast-check takes a signed 32-bit seed. */
const SEED_LIMIT = 2 ** 31;

/**
 * One seed for every worker of a run: the one asked for, or a fresh one, printed so that any failure can be played
 * again. Workers inherit it through the environment.
 */
export default function chooseSeed(): void {
  if (process.env.EIDOGRAPH_SEED !== undefined) return;
  process.env.EIDOGRAPH_SEED = String(randomInt(SEED_LIMIT));
  console.log(
    `fast-check seed=${process.env.EIDOGRAPH_SEED}, replay: EIDOGRAPH_SEED=${process.env.EIDOGRAPH_SEED} npm test`,
  );
}
