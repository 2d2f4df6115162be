/** Pieces of one mass that a workshop has. */
export interface Piece {
  readonly massKg: number;
  readonly count: number;
}

/** What is taken from a stock: as many of each of its pieces, in its order. */
export interface Taken {
  readonly massKg: number;
  readonly counts: readonly number[];
}

/** Masses closer than this are one: a tenth of a gram. */
const SAME_KG = 1e-4;
/** Different sums looked at; a stock that makes more of them is rich enough to stop. */
const SUMS = 20_000;

/**
 * The pieces whose mass together is nearest to a mass; of equally near ones the fewest pieces. Nothing, if nothing is
 * nearest.
 */
export function nearestPieces(stock: readonly Piece[], massKg: number): Taken {
  let sums = new Map<number, Taken>([[0, { massKg: 0, counts: stock.map(() => 0) }]]);
  for (const [i, piece] of stock.entries()) {
    const more = new Map(sums);
    for (const { massKg: from, counts } of sums.values()) {
      for (let count = 1; count <= piece.count && more.size < SUMS; count++) {
        const taken = { massKg: from + count * piece.massKg, counts: counts.with(i, count) };
        const key = Math.round(taken.massKg / SAME_KG);
        const known = more.get(key);
        if (known === undefined || pieces(taken) < pieces(known)) more.set(key, taken);
        // Further pieces only lead further away.
        if (taken.massKg > massKg) break;
      }
    }
    sums = more;
  }
  const off = (taken: Taken): number => Math.abs(taken.massKg - massKg);
  return [...sums.values()].reduce((best, taken) => {
    const nearer = off(best) - off(taken);
    return nearer > SAME_KG / 2 || (nearer > -SAME_KG / 2 && pieces(taken) < pieces(best)) ? taken : best;
  });
}

function pieces({ counts }: Taken): number {
  return counts.reduce((sum, count) => sum + count, 0);
}

/** The stock without what was taken. */
export function without(stock: readonly Piece[], { counts }: Taken): readonly Piece[] {
  return stock.map((piece, i) => ({ ...piece, count: piece.count - (counts[i] ?? 0) }));
}
