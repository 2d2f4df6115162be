/** A stream of chance that its seed decides: the same seed and stream give the same values on every machine. */
export interface Random {
  /** Uniform in [0, 1). */
  uniform(): number;
  /** Uniform in [low, high). */
  between(low: number, high: number): number;
  /** Gaussian, mean 0 and deviation 1. */
  normal(): number;
}

const WORD = 2 ** 32;
/** 2^32 divided by the golden ratio: spreads neighbouring seeds and channels over the whole word. */
const GOLDEN = 0x9e3779b9;
/** Rounds after which sfc32's author calls a seed well mixed (PractRand; from memory). */
const MIXING_ROUNDS = 15;

/**
 * Small fast counting generator on 32-bit words, sfc32 (C. Doty-Humphrey, PractRand, public domain; from memory).
 * @param seed any finite number; its whole part counts, modulo 2^53
 * @param stream which of the independent streams of this seed
 */
export function random(seed: number, stream: number): Random {
  let a = lowWord(seed);
  let b = highWord(seed);
  let c = lowWord(stream);
  let counter = 1;
  const word = (): number => {
    const sum = (a + b + counter) | 0;
    counter = (counter + 1) | 0;
    a = b ^ (b >>> 9);
    b = (c + (c << 3)) | 0;
    c = (((c << 21) | (c >>> 11)) + sum) | 0;
    return sum >>> 0;
  };
  for (let round = 0; round < MIXING_ROUNDS; round++) word();
  const uniform = (): number => word() / WORD;
  return {
    uniform,
    between: (low, high) => low + (high - low) * uniform(),
    normal: () => gaussianOf(1 - uniform(), uniform()),
  };
}

/**
 * Gaussian noise as a pure function of seed, instant and channel, mean 0 and deviation 1: a noisy reading then
 * depends on when it is taken, never on how many were taken before.
 */
export function noiseAt(seed: number, atUs: number, channel: number): number {
  let hash = mixed(lowWord(seed) + GOLDEN * (channel + 1));
  hash = mixed(hash ^ highWord(seed));
  hash = mixed(hash ^ lowWord(atUs));
  hash = mixed(hash ^ highWord(atUs));
  return gaussianOf((hash + 1) / WORD, mixed(hash ^ GOLDEN) / WORD);
}

/**
 * Of two independent uniform numbers, the first above 0.
 * Box and Muller, "A Note on the Generation of Random Normal Deviates", Ann. Math. Statist. 29 (1958) 610-611.
 */
function gaussianOf(size: number, turn: number): number {
  return Math.sqrt(-2 * Math.log(size)) * Math.cos(2 * Math.PI * turn);
}

/** Finaliser of MurmurHash3 for 32 bits (A. Appleby, public domain; from memory): every input bit stirs every output bit. */
function mixed(value: number): number {
  let word = value | 0;
  word = Math.imul(word ^ (word >>> 16), 0x85ebca6b);
  word = Math.imul(word ^ (word >>> 13), 0xc2b2ae35);
  return (word ^ (word >>> 16)) >>> 0;
}

function lowWord(value: number): number {
  return value | 0;
}

function highWord(value: number): number {
  return Math.floor(value / WORD) | 0;
}
