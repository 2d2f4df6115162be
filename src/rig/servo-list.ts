import type { Path } from './located.ts';

type Weights = Readonly<Record<string, number | undefined>>;

interface ServoKeys {
  readonly channel?: number | undefined;
  readonly points?: readonly (readonly [number, number])[] | undefined;
}

interface JointKeys {
  readonly name?: string | undefined;
  readonly servo?: ServoKeys | undefined;
}

interface CoupledKeys extends ServoKeys {
  readonly turns?: Weights | undefined;
}

/** One servo of a follower, wherever its file writes it. */
export interface ListedServo<J extends JointKeys, S extends CoupledKeys> {
  readonly servo: NonNullable<J['servo']> | S;
  readonly path: Path;
  /** The joint it turns alone; null where it is one of the coupled ones. */
  readonly joint: J | null;
  /** Joints with their weights, whose sum is the servo's angle. */
  readonly turns: Weights;
}

/** Every servo in the order of pulses: the joints' own in joint order, then the coupled ones. */
export function servosOf<J extends JointKeys, S extends CoupledKeys>(follower: {
  readonly joints?: readonly J[] | undefined;
  readonly servos?: readonly S[] | undefined;
}): readonly ListedServo<J, S>[] {
  const { joints = [], servos = [] } = follower;
  return [
    ...joints.flatMap((joint, i) => {
      const { servo, name } = joint;
      const turns: Weights = name === undefined ? {} : { [name]: 1 };
      return servo === undefined ? [] : [{ servo, path: ['joints', i, 'servo'], joint, turns }];
    }),
    ...servos.map((servo, i) => ({ servo, path: ['servos', i], joint: null, turns: servo.turns ?? {} })),
  ];
}
