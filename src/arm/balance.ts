import { GRAVITY_MS2 } from './bodies.ts';
import { length } from './extent.ts';
import { loads } from './load.ts';
import { massMoment } from './mass-moment.ts';
import type { ArmSpec, LinkSpec, MassSpec, Vec3 } from './spec.ts';
import { nearestPieces, type Piece, type Taken, without } from './stock.ts';
import { worst, type Worst } from './worst.ts';

/** How a joint is to be balanced: its weight sits at a distance from the axis, or has a mass. */
export type BalanceWish = { readonly joint: number } & ({ readonly distanceM: number } | { readonly massKg: number });

export interface BalanceRequest {
  readonly wishes: readonly BalanceWish[];
  /** Ranges in joint order, radians. */
  readonly minRad: ArrayLike<number>;
  readonly maxRad: ArrayLike<number>;
  /** Pieces that weights are made of, each used once; null: any mass can be had. */
  readonly stock: readonly Piece[] | null;
}

/** A counterweight that balances a joint. */
export interface Balanced {
  readonly joint: number;
  readonly counterweight: MassSpec;
  /** Pieces of the stock that it is made of; null without a stock. */
  readonly taken: Taken | null;
  /** Distance from the axis at which exactly this mass balances best: where to slide it to. Infinity without any mass. */
  readonly exactDistanceM: number;
  /** Torque that no weight on this link can take, because the joints beyond or the payload move it, newton metres. */
  readonly strayNm: number;
  /** Greatest static torque of the joint over all ranges, without payload or with all of it, and where. */
  readonly before: Worst;
  readonly after: Worst;
}

export interface Balance {
  /** The arm with its counterweights. */
  readonly spec: ArmSpec;
  /** From the tip inward. */
  readonly joints: readonly Balanced[];
  /** Joints asked for that no weight helps: what is beyond them pulls at them in no pose, or is in balance already. */
  readonly idle: readonly number[];
}

/** A mass moment below this, kilogram metres, is in balance: a gram at a millimetre. */
const NOTHING_KGM = 1e-6;

/**
 * Counterweights for joints of an arm, from the tip inward: each joint's weight sees the weights further out. An arm
 * whose outer joints are in balance is in balance at the inner ones in every pose; where they are not, or a payload comes
 * and goes, the weight takes the middle of what there is, and `strayNm` stays. A weight that a link has already is
 * replaced.
 */
export function balance(spec: ArmSpec, request: BalanceRequest): Balance {
  const { minRad, maxRad } = request;
  let arm = spec;
  let stock = request.stock;
  const joints: Balanced[] = [];
  const idle: number[] = [];
  for (let i = spec.links.length - 1; i >= 0; i--) {
    const { joint } = arm.links[i] as LinkSpec;
    const wish = request.wishes.find((one) => one.joint === joint);
    if (wish === undefined) continue;
    const bare = withWeight(arm, i, null);
    const { middleKgM, strayKgM } = massMoment([unloaded(bare), bare], i, minRad, maxRad);
    const before = worstNm(bare, joint, minRad, maxRad);
    if (length(middleKgM) < NOTHING_KGM || before.value < GRAVITY_MS2 * NOTHING_KGM) {
      idle.push(joint);
      continue;
    }
    const { counterweight, taken } = weightFor(wish, middleKgM, stock);
    if (taken !== null && stock !== null) stock = without(stock, taken);
    arm = counterweight.massKg === 0 ? bare : withWeight(bare, i, counterweight);
    joints.push({
      joint,
      counterweight,
      taken,
      exactDistanceM: length(middleKgM) / counterweight.massKg,
      strayNm: GRAVITY_MS2 * strayKgM,
      before,
      after: worstNm(arm, joint, minRad, maxRad),
    });
  }
  return { spec: arm, joints, idle };
}

function weightFor(
  wish: BalanceWish,
  moment: Vec3,
  stock: readonly Piece[] | null,
): { counterweight: MassSpec; taken: Taken | null } {
  const size = length(moment);
  const wanted = 'massKg' in wish ? wish.massKg : size / wish.distanceM;
  const taken = stock === null ? null : nearestPieces(stock, wanted);
  const massKg = taken === null ? wanted : taken.massKg;
  const distanceM = 'massKg' in wish ? (massKg === 0 ? 0 : size / massKg) : wish.distanceM;
  const [x, y, z] = moment;
  const share = -distanceM / size;
  return { counterweight: { massKg, atM: [share * x, share * y, share * z] }, taken };
}

/** The same arm with another counterweight on a link, or with none. */
export function withWeight(spec: ArmSpec, link: number, counterweight: MassSpec | null): ArmSpec {
  return { ...spec, links: spec.links.map((one, i) => (i === link ? { ...one, counterweight } : one)) };
}

/** The same arm with nothing at its tip. */
export function unloaded(spec: ArmSpec): ArmSpec {
  return { ...spec, payload: null };
}

/** Greatest size of a joint's static torque over all ranges, without payload or with all of it, newton metres. */
export function worstNm(spec: ArmSpec, joint: number, minRad: ArrayLike<number>, maxRad: ArrayLike<number>): Worst {
  const torque = new Float64Array(minRad.length);
  const joints = spec.links.map((link) => link.joint);
  const found = [unloaded(spec), spec].map((one) => {
    const { torqueNm } = loads(one, minRad.length);
    return worst({ minRad, maxRad, joints }, (pose) => {
      torqueNm(pose, torque);
      return Math.abs(torque[joint] as number);
    });
  });
  return found.reduce((a, b) => (b.value > a.value ? b : a));
}
