import type { Chain } from './chain.ts';
import { length } from './extent.ts';
import type { Vec3 } from './spec.ts';

/** The pitch of a chain's last link against the horizontal, as a function of the joints that move. */
export interface Pitch {
  /** Radians, 1 value: upwards positive, and never beyond upright. */
  readonly rad: Float64Array;
  /** Its first derivative for each column. */
  readonly slope: Float64Array;
  /** Fills both at the chain's present pose; a last link without length has no pitch: 0 and flat. */
  look(): void;
  /** out[c size + b] (c >= b) += share times its second derivative, where it was looked at. */
  addBend(share: number, out: Float64Array, size: number): void;
}

/** Nearer to the vertical than this, the derivatives are not let grow further: cosine of the pitch. */
const UPRIGHT = 0.1;

/** @param links the link of each column, base first */
export function pitchOf({ spec, links: count, at, axis }: Chain, links: Uint8Array): Pitch {
  const m = links.length;
  const tip = 3 * count;
  const lastM = length(spec.links.at(-1)?.toM as Vec3);
  const rad = new Float64Array(1);
  const slope = new Float64Array(m);
  /** Direction of the last link. */
  const u = new Float64Array(3);
  const flat = (): number => Math.sqrt((u[0] as number) ** 2 + (u[1] as number) ** 2);

  return {
    rad,
    slope,
    look() {
      if (lastM === 0) return;
      for (let k = 0; k < 3; k++) u[k] = ((at[tip + k] as number) - (at[tip - 3 + k] as number)) / lastM;
      const cosine = flat();
      rad[0] = Math.atan2(u[2] as number, cosine);
      for (let c = 0; c < m; c++) {
        const a = 3 * (links[c] as number);
        const rises = (axis[a] as number) * (u[1] as number) - (axis[a + 1] as number) * (u[0] as number);
        slope[c] = rises / Math.max(cosine, UPRIGHT);
      }
    },
    addBend(share, out, size) {
      const cosine = Math.max(flat(), UPRIGHT);
      const lean = (u[2] as number) / cosine;
      for (let c = 0; c < m; c++) {
        const a = 3 * (links[c] as number);
        const ax = axis[a] as number;
        const ay = axis[a + 1] as number;
        const az = axis[a + 2] as number;
        // u turns by a_c x u, and that with the inner joint by a_b x (a_c x u); the pitch is asin u_z.
        const wx = ay * (u[2] as number) - az * (u[1] as number);
        const wy = az * (u[0] as number) - ax * (u[2] as number);
        for (let b = 0; b <= c; b++) {
          const i = 3 * (links[b] as number);
          const second = ((axis[i] as number) * wy - (axis[i + 1] as number) * wx) / cosine;
          const bent = second + lean * (slope[c] as number) * (slope[b] as number);
          out[c * size + b] = (out[c * size + b] as number) + share * bent;
        }
      }
    },
  };
}
