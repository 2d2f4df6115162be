import type { MistakeCase } from './case.ts';

/** Geometry that cannot be, and limits that nothing keeps yet. */
export const ARM_CASES: readonly MistakeCase[] = [
  {
    title: 'an arm without length',
    stork: [['poses:', 'arm: { links: [{ joint: shoulder, axis: y, to_mm: [0, 0, 0] }] }\nposes:']],
    says: ['RIG_ARM stork.yaml:22:15: arm.links: the arm has no length; give to_mm of each link, in millimetres'],
  },
  {
    title: 'a spring without length',
    stork: [
      [
        'poses:',
        'arm: { links: [{ joint: shoulder, axis: y, to_mm: [0, 0, 40], spring: { n_per_mm: 1, free_mm: 9, from_mm: [1, 2, 3], to_mm: [1, 2, 3] } }] }\nposes:',
      ],
    ],
    says: [
      'RIG_ARM stork.yaml:22:71: arm.links[0].spring: both ends of the spring are at one place; give from_mm and to_mm, in millimetres',
    ],
  },
  {
    title: 'a link of an unknown joint',
    stork: [['poses:', 'arm: { links: [{ joint: sholder, axis: y, to_mm: [0, 0, 40] }] }\nposes:']],
    says: ['RIG_JOINT_UNKNOWN stork.yaml:22:25: arm.links[0].joint: there is no joint sholder; did you mean shoulder?'],
  },
  {
    title: 'two links of one joint',
    stork: [
      [
        'poses:',
        'arm: { links: [{ joint: elbow, axis: y, to_mm: [0, 0, 40] }, { joint: elbow, axis: y, to_mm: [0, 0, 40] }] }\nposes:',
      ],
    ],
    says: [
      'RIG_NAME_TWICE stork.yaml:22:71: arm.links[1].joint: elbow already turns a link; give each link a joint of its own',
    ],
  },
  {
    title: 'a link about an axis that is none',
    stork: [['poses:', 'arm: { links: [{ joint: elbow, axis: w, to_mm: [0, 0, 40] }] }\nposes:']],
    says: ['RIG_VALUE_CHOICE stork.yaml:22:38: arm.links[0].axis: axis is the text "w"; choose one of x, y, z'],
  },
  {
    title: 'a mass below nothing',
    stork: [['poses:', 'arm: { links: [{ joint: elbow, axis: x, to_mm: [0, 0, 40], mass_g: -3 }] }\nposes:']],
    says: [
      'RIG_VALUE_BOUNDS stork.yaml:22:68: arm.links[0].mass_g: mass_g is -3; give at least 0: the mass of the link, in grams',
    ],
  },
  {
    title: 'follow: tip',
    stork: [['rate_hz: 50', 'follow: tip']],
    says: [
      'RIG_NOT_ENFORCED stork.yaml:4:9: follow: follow: tip is not yet enforced by this version; remove it, and keep the speed down with speed_deg_s',
    ],
  },
  {
    title: 'a cap on the tip',
    stork: [['rate_hz: 50', 'tip_speed_mm_s: 250']],
    says: [
      'RIG_NOT_ENFORCED stork.yaml:4:17: tip_speed_mm_s: tip_speed_mm_s is not yet enforced by this version; remove it, and keep the speed down with speed_deg_s',
    ],
  },
  {
    title: 'a keep-out',
    stork: [['rate_hz: 50', 'keep_out: [{ below_mm: 0 }]']],
    says: [
      'RIG_NOT_ENFORCED stork.yaml:4:11: keep_out: keep_out is not yet enforced by this version; remove it, and keep the speed down with speed_deg_s',
    ],
  },
  {
    title: 'a keep-out box upside down',
    stork: [['rate_hz: 50', 'keep_out: [{ box_mm: [[0, 0, 9], [9, 9, 0]] }]']],
    says: [
      'RIG_NOT_ENFORCED stork.yaml:4:11: keep_out: keep_out is not yet enforced by this version; remove it, and keep the speed down with speed_deg_s',
      'RIG_SPAN_ORDER stork.yaml:4:22: keep_out[0].box_mm: the first corner of the box is not the lower one on every axis; write [[lowest x, y, z], [highest x, y, z]], in millimetres',
    ],
  },
  {
    title: 'a keep-out of an unknown kind',
    stork: [['rate_hz: 50', 'keep_out: [{ bellow_mm: 0 }]']],
    says: [
      'RIG_NOT_ENFORCED stork.yaml:4:11: keep_out: keep_out is not yet enforced by this version; remove it, and keep the speed down with speed_deg_s',
      'RIG_KEY_UNKNOWN stork.yaml:4:14: keep_out[0].bellow_mm: "bellow_mm" is not a key here; did you mean below_mm?',
    ],
  },
  {
    title: 'a load limit',
    stork: [['rate_hz: 50', 'load: limit']],
    says: [
      'RIG_NOT_ENFORCED stork.yaml:4:7: load: load: limit is not yet enforced by this version; remove it, and keep the speed down with speed_deg_s',
    ],
  },
];
