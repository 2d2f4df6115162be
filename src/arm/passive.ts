import type { ArmSpec, LinkSpec, SpringSpec, Vec3 } from './spec.ts';

/**
 * Torques of what pulls on a joint without a motor: its spring and its cable. They depend on that joint's angle alone,
 * because both ends of the spring belong to the two links that the joint connects.
 *
 * A spring pulls with k (length - free length) along the line between its ends, and hangs slack when it is shorter: coil
 * springs are made to pull. A cable twists back with its stiffness times the angle from where it is free.
 */
export interface Passive {
  /** out[i] += torque about link i's axis, newton metres, that the motor must supply against spring and cable. */
  addHeld(anglesRad: Float64Array, out: Float64Array): void;
  /** Stored in springs and cables, joules. */
  energyJ(anglesRad: Float64Array): number;
}

/** Two points that turn about an axis, seen along it: what of the length changes with the angle. */
interface Coil {
  /** Length squared is base - 2 (cosine cos q + sine sin q), square metres. */
  readonly base: number;
  readonly cosine: number;
  readonly sine: number;
  readonly nPerM: number;
  readonly freeM: number;
}

export function passive(spec: ArmSpec): Passive {
  const n = spec.links.length;
  const coils = spec.links.map((link, i) =>
    link.spring === null ? null : coil(link, link.spring, spec.links[i - 1]?.toM ?? ORIGIN),
  );
  const lengthM = (at: Coil, q: number): number =>
    Math.sqrt(Math.max(0, at.base - 2 * (at.cosine * Math.cos(q) + at.sine * Math.sin(q))));

  return {
    addHeld(anglesRad, out) {
      for (let i = 0; i < n; i++) {
        const { joint, cable } = spec.links[i] as LinkSpec;
        const q = anglesRad[joint] as number;
        if (cable !== null) out[i] = (out[i] as number) + cable.nmPerRad * (q - cable.freeRad);
        const at = coils[i] as Coil | null;
        if (at === null) continue;
        const length = lengthM(at, q);
        // A length of nothing has no direction to pull in, and slack pulls nothing.
        if (length <= at.freeM || length === 0) continue;
        // Holding against it costs the slope of its energy: k (L - free) dL/dq.
        const slope = (at.cosine * Math.sin(q) - at.sine * Math.cos(q)) / length;
        out[i] = (out[i] as number) + at.nPerM * (length - at.freeM) * slope;
      }
    },
    energyJ(anglesRad) {
      let sum = 0;
      for (let i = 0; i < n; i++) {
        const { joint, cable } = spec.links[i] as LinkSpec;
        const q = anglesRad[joint] as number;
        if (cable !== null) sum += 0.5 * cable.nmPerRad * (q - cable.freeRad) ** 2;
        const at = coils[i] as Coil | null;
        if (at !== null) sum += 0.5 * at.nPerM * Math.max(0, lengthM(at, q) - at.freeM) ** 2;
      }
      return sum;
    },
  };
}

const ORIGIN: Vec3 = [0, 0, 0];

/**
 * Ends p (on the link before, whose end is this axis) and r (on this one, turned by q about a): r turns to r cos q + (a x r) sin q + a (a . r)
 * (1 - cos q), so |p - turned r|^2 = p^2 + r^2 - 2 (p.a)(r.a) - 2 [(p.r - (p.a)(r.a)) cos q + p.(a x r) sin q].
 */
function coil({ axis: [ax, ay, az] }: LinkSpec, spring: SpringSpec, endM: Vec3): Coil {
  const px = spring.fromM[0] - endM[0];
  const py = spring.fromM[1] - endM[1];
  const pz = spring.fromM[2] - endM[2];
  const [rx, ry, rz] = spring.toM;
  const along = (px * ax + py * ay + pz * az) * (rx * ax + ry * ay + rz * az);
  return {
    base: px * px + py * py + pz * pz + rx * rx + ry * ry + rz * rz - 2 * along,
    cosine: px * rx + py * ry + pz * rz - along,
    sine: px * (ay * rz - az * ry) + py * (az * rx - ax * rz) + pz * (ax * ry - ay * rx),
    nPerM: spring.nPerM,
    freeM: spring.freeM,
  };
}
