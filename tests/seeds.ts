import fc from 'fast-check';

fc.configureGlobal({ seed: seedOfRun(process.env.EIDOGRAPH_SEED) });

/** A mistyped seed must not quietly test something else. */
function seedOfRun(text: string | undefined): number {
  const seed = Number(text);
  if (!text || !Number.isInteger(seed)) throw new Error(`EIDOGRAPH_SEED is "${text}"; it must be an integer`);
  return seed;
}
