/**
 * Magnitudes of the discrete Fourier transform of a real signal padded with zeros to `size`, a power of two, up to half
 * the sampling rate: `size / 2 + 1` values. Radix 2, in place (J. W. Cooley, J. W. Tukey, Math. Comput. 19 (1965) 297-301).
 */
export function magnitudes(signal: Float64Array, size: number): Float64Array {
  const re = new Float64Array(size);
  const im = new Float64Array(size);
  re.set(signal);
  reorder(re);
  for (let span = 1; span < size; span *= 2) {
    const angle = -Math.PI / span;
    for (let k = 0; k < span; k++) {
      const wr = Math.cos(angle * k);
      const wi = Math.sin(angle * k);
      for (let at = k; at < size; at += 2 * span) {
        const other = at + span;
        const xr = wr * (re[other] as number) - wi * (im[other] as number);
        const xi = wr * (im[other] as number) + wi * (re[other] as number);
        re[other] = (re[at] as number) - xr;
        im[other] = (im[at] as number) - xi;
        re[at] = (re[at] as number) + xr;
        im[at] = (im[at] as number) + xi;
      }
    }
  }
  return Float64Array.from({ length: size / 2 + 1 }, (_, k) => Math.hypot(re[k] as number, im[k] as number));
}

/** Bit-reversed order; the imaginary part is zero still. */
function reorder(re: Float64Array): void {
  const size = re.length;
  for (let i = 1, j = 0; i < size; i++) {
    let bit = size >> 1;
    for (; (j & bit) !== 0; bit >>= 1) j ^= bit;
    j ^= bit;
    if (i >= j) continue;
    const kept = re[i] as number;
    re[i] = re[j] as number;
    re[j] = kept;
  }
}
