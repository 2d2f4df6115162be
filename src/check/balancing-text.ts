import type { BalanceCost, BalancedJoint, BalanceReport, SpringInstead } from './balancing.ts';
import { listed } from './endings.ts';
import { brief, DASH, fixed, percent } from './figures.ts';
import { table } from './table.ts';

/** The report of `balance` as lines for people. */
export function balanceLines({ profile, joints, idle, cost }: BalanceReport): readonly string[] {
  if (joints.length === 0)
    return [`${profile}: no weight helps ${listed(idle)}: nothing pulls there, or all is in balance`];
  return [
    `${profile}, from the tip inward; torques are the worst over all ranges, with the payload or without`,
    ...weightTable(joints),
    ...(idle.length === 0 ? [] : [`  no weight helps ${listed(idle)}: nothing pulls there, or all is in balance`]),
    '',
    'instead of a weight, a spring from a point on the link before to one on the link',
    ...springTable(joints),
    '',
    'what the weights cost',
    ...costLines(cost),
  ];
}

function weightTable(joints: readonly BalancedJoint[]): readonly string[] {
  return table(
    [
      'joint',
      'weight',
      'at mm',
      'without Nm',
      'with Nm',
      'empty',
      'full',
      'to hold',
      'cannot be taken Nm',
      'exact at mm',
    ],
    joints.map((one) => [
      one.joint,
      weightText(one),
      one.counterweight === null ? DASH : placeText(one.counterweight.at_mm),
      fixed(one.before_nm, 3),
      fixed(one.after_nm, 3),
      fixed(one.after_empty_nm, 3),
      fixed(one.after_full_nm, 3),
      percent(one.after_share),
      fixed(one.stray_nm, 3),
      fixed(one.exact_distance_mm, 1),
    ]),
    '  ',
  );
}

function weightText({ counterweight, pieces }: BalancedJoint): string {
  if (counterweight === null) return 'no pieces fit';
  const made = pieces?.map(({ mass_g, count }) => `${count} × ${mass_g} g`).join(' + ') ?? '';
  return made === '' ? `${counterweight.mass_g} g` : made;
}

function springTable(joints: readonly BalancedJoint[]): readonly string[] {
  return table(
    ['joint', 'N/mm', 'free mm', 'from mm', 'to mm', 'with Nm', ''],
    joints.map(({ joint, spring }) => [joint, ...springCells(spring)]),
    '  ',
  );
}

function springCells(spring: SpringInstead | null): readonly string[] {
  if (spring === null) return [DASH, DASH, DASH, DASH, DASH, 'its axis is upright'];
  return [
    brief(spring.n_per_mm),
    brief(spring.free_mm),
    placeText(spring.from_mm),
    placeText(spring.to_mm),
    fixed(spring.after_nm, 3),
    spring.fixed ? 'its fixed end stays where it is' : 'its fixed end turns: never exact',
  ];
}

function costLines({ moving_mass_g: [was, is], tipping_nm, joints }: BalanceCost): readonly string[] {
  const tipping =
    tipping_nm === null
      ? ''
      : `; ${fixed(tipping_nm[1], 2)} Nm hold the base down instead of ${fixed(tipping_nm[0], 2)}`;
  return [
    `  the first bearing carries ${fixed(is, 0)} g instead of ${fixed(was, 0)}${tipping}`,
    ...table(
      ['joint', 'inertia kg m2', 'instead of', 'may speed up deg/s2', 'instead of', 'is asked'],
      joints.map(({ joint, inertia_kg_m2, accel_left_deg_s2, accel_deg_s2 }) => [
        joint,
        brief(inertia_kg_m2[1]),
        brief(inertia_kg_m2[0]),
        fixed(accel_left_deg_s2?.[1] ?? null, 0),
        fixed(accel_left_deg_s2?.[0] ?? null, 0),
        fixed(accel_deg_s2, 0),
      ]),
      '  ',
    ),
  ];
}

function placeText(place: readonly number[]): string {
  return `[${place.join(', ')}]`;
}
