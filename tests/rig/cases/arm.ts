import type { MistakeCase } from './case.ts';

type Edit = readonly [string, string];

const PLAIN = '{ joint: shoulder, axis: y, to_mm: [0, 0, 40] }';
/** Puts an arm on line 22. */
const armed = (arm: string): Edit => ['poses:', `arm: ${arm}\nposes:`];
const linked = (...links: readonly string[]): Edit => armed(`{ links: [${links.join(', ')}] }`);
const spring = (keys: string): Edit =>
  linked(`{ joint: shoulder, axis: y, to_mm: [0, 0, 40], spring: { n_per_mm: 1, free_mm: 9, ${keys} } }`);
const outline = (corners: string): Edit =>
  armed(`{ base: { mass_g: 9, footprint_mm: ${corners} }, links: [${PLAIN}] }`);

const LEADER_ARM: Edit = [
  '  buttons:',
  '  arm: { links: [{ joint: shoulder, axis: y, to_mm: [0, 0, 40] }] }\n  buttons:',
];
const MISSING = 'give its links, such as arm: { links: [{ joint: shoulder, axis: y, to_mm: [0, 0, 280] }] }';
const ENDS = 'give from_mm on the link before and to_mm on this link, in millimetres at the zero pose';
const AXIS = 'this end of the spring is on the joint’s axis, where it turns nothing; hold it away from the axis';
const OUTLINE =
  'the corners of the footprint enclose nothing, or their outline crosses itself; list the corners [x, y] in order round, in millimetres';

/** Geometry that cannot be, and what asks for geometry that is not there. */
export const ARM_CASES: readonly MistakeCase[] = [
  {
    title: 'an arm without length',
    stork: [linked('{ joint: shoulder, axis: y, to_mm: [0, 0, 0] }')],
    says: ['RIG_ARM stork.yaml:22:15: arm.links: the arm has no length; give to_mm of each link, in millimetres'],
  },
  {
    title: 'a spring without length',
    stork: [spring('from_mm: [1, 2, 3], to_mm: [1, 2, 3]')],
    says: [`RIG_ARM stork.yaml:22:71: arm.links[0].spring: both ends of the spring are at one place; ${ENDS}`],
  },
  {
    title: 'a spring without length that is held on the link before',
    stork: [
      linked(
        PLAIN,
        // The elbow's axis is 40 mm up the first link: 45 mm up that link is 5 mm above it.
        '{ joint: elbow, axis: y, to_mm: [0, 0, 30], spring: { n_per_mm: 1, free_mm: 9, from_mm: [8, 0, 45], to_mm: [8, 0, 5] } }',
      ),
    ],
    says: [`RIG_ARM stork.yaml:22:117: arm.links[1].spring: both ends of the spring are at one place; ${ENDS}`],
  },
  {
    title: 'a spring that is held on the axis',
    stork: [spring('from_mm: [0, 7, 0], to_mm: [0, 3, 20]')],
    says: [`RIG_ARM stork.yaml:22:107: arm.links[0].spring.from_mm: ${AXIS}`],
  },
  {
    title: 'a spring that pulls at the axis',
    stork: [spring('from_mm: [0, 7, 1], to_mm: [0, 3, 0]')],
    says: [`RIG_ARM stork.yaml:22:125: arm.links[0].spring.to_mm: ${AXIS}`],
  },
  {
    title: 'a spring without stiffness',
    stork: [
      linked(
        '{ joint: shoulder, axis: y, to_mm: [0, 0, 40], spring: { n_per_mm: 0, free_mm: 0, from_mm: [9, 0, 0], to_mm: [0, 0, 9] } }',
      ),
    ],
    says: [
      'RIG_VALUE_BOUNDS stork.yaml:22:83: arm.links[0].spring.n_per_mm: n_per_mm is 0; give more than 0: the stiffness of the spring, in newtons per millimetre, above 0',
    ],
  },
  {
    title: 'a link of an unknown joint',
    stork: [linked('{ joint: sholder, axis: y, to_mm: [0, 0, 40] }')],
    says: ['RIG_JOINT_UNKNOWN stork.yaml:22:25: arm.links[0].joint: there is no joint sholder; did you mean shoulder?'],
  },
  {
    title: 'two links of one joint',
    stork: [linked('{ joint: elbow, axis: y, to_mm: [0, 0, 40] }', '{ joint: elbow, axis: y, to_mm: [0, 0, 40] }')],
    says: [
      'RIG_NAME_TWICE stork.yaml:22:71: arm.links[1].joint: elbow already turns a link; give each link a joint of its own',
    ],
  },
  {
    title: 'links in another order than the joints',
    stork: [linked('{ joint: elbow, axis: y, to_mm: [0, 0, 40] }', PLAIN)],
    says: [
      'RIG_LINK_ORDER stork.yaml:22:71: arm.links[1].joint: the link of shoulder comes after that of elbow, and its joint before; list joints and links from the base to the tip, both in one order',
    ],
  },
  {
    title: 'more links than arms here have',
    stork: [linked(...Array.from({ length: 9 }, () => PLAIN))],
    says: [
      'RIG_LIST_LENGTH stork.yaml:22:15: arm.links: links has 9 entries; give at most 8: the links, one a joint, base first',
    ],
  },
  {
    title: 'a link about an axis that is none',
    stork: [linked('{ joint: elbow, axis: w, to_mm: [0, 0, 40] }')],
    says: ['RIG_VALUE_CHOICE stork.yaml:22:38: arm.links[0].axis: axis is the text "w"; choose one of x, y, z'],
  },
  {
    title: 'a link about an axis without direction',
    stork: [linked('{ joint: elbow, axis: [0, 0, 0], to_mm: [0, 0, 40] }')],
    says: [
      'RIG_ARM stork.yaml:22:38: arm.links[0].axis: this axis points nowhere; give x, y, z, or a direction such as [0, 0.6, 0.8]',
    ],
  },
  ...[-3, 0].map((mass) => ({
    title: `a mass of ${mass} g`,
    stork: [linked(`{ joint: elbow, axis: x, to_mm: [0, 0, 40], mass_g: ${mass} }`)],
    says: [
      `RIG_VALUE_BOUNDS stork.yaml:22:68: arm.links[0].mass_g: mass_g is ${mass}; give more than 0: the mass of the link, in grams, above 0`,
    ],
  })),
  {
    title: 'a base below the floor',
    stork: [armed(`{ base: { height_mm: -5 }, links: [${PLAIN}] }`)],
    says: [
      'RIG_VALUE_BOUNDS stork.yaml:22:27: arm.base.height_mm: height_mm is -5; give at least 0: the height of the first axis above the floor, in millimetres',
    ],
  },
  {
    title: 'friction without a footprint',
    stork: [armed(`{ base: { mass_g: 900, friction: 0.4 }, links: [${PLAIN}] }`)],
    says: [
      'RIG_TIPPING stork.yaml:22:39: arm.base.friction: friction without a footprint: tipping and sliding need both; give footprint_mm, the corners that stand on the floor: [[120, 120], [-120, 120], [-120, -120], [120, -120]]',
    ],
  },
  {
    title: 'a footprint without a mass',
    stork: [armed(`{ base: { footprint_mm: [[9, 9], [-9, 9], [0, -9]] }, links: [${PLAIN}] }`)],
    says: [
      'RIG_TIPPING stork.yaml:22:30: arm.base.footprint_mm: a footprint without a mass: nothing holds the base down; give mass_g, the mass of the base in grams',
    ],
  },
  {
    title: 'a footprint in line',
    stork: [outline('[[0, 0], [10, 10], [30, 30]]')],
    says: [`RIG_TIPPING stork.yaml:22:41: arm.base.footprint_mm: ${OUTLINE}`],
  },
  {
    title: 'a footprint whose corners are not in order round',
    stork: [outline('[[9, 9], [-9, 9], [9, -9], [-5, -9]]')],
    says: [`RIG_TIPPING stork.yaml:22:41: arm.base.footprint_mm: ${OUTLINE}`],
  },
  ...[
    ['follow: tip', 'follow', 9, 'follow: tip'],
    ['tip_speed_mm_s: 250', 'tip_speed_mm_s', 17, 'tip_speed_mm_s'],
    ['keep_out: [{ below_mm: 0 }]', 'keep_out', 11, 'keep_out'],
    ['load: limit', 'load', 7, 'load: limit'],
    ['moving_load: limit', 'moving_load', 14, 'moving_load: limit'],
  ].map(([line, key, column, what]) => ({
    title: `${line}, without geometry`,
    rig: [LEADER_ARM],
    stork: [['rate_hz: 50', String(line)] as const],
    says: [`RIG_ARM_MISSING stork.yaml:4:${column}: ${key}: ${what} needs the arm's geometry; ${MISSING}`],
  })),
  {
    title: 'a keep-out box upside down',
    stork: [['rate_hz: 50', 'keep_out: [{ box_mm: [[0, 0, 9], [9, 9, 0]] }]']],
    says: [
      `RIG_ARM_MISSING stork.yaml:4:11: keep_out: keep_out needs the arm's geometry; ${MISSING}`,
      'RIG_SPAN_ORDER stork.yaml:4:22: keep_out[0].box_mm: the first corner of the box is not the lower one on every axis; write [[lowest x, y, z], [highest x, y, z]], in millimetres',
    ],
  },
  {
    title: 'a keep-out of an unknown kind',
    stork: [['rate_hz: 50', 'keep_out: [{ bellow_mm: 0 }]']],
    says: [
      `RIG_ARM_MISSING stork.yaml:4:11: keep_out: keep_out needs the arm's geometry; ${MISSING}`,
      'RIG_KEY_UNKNOWN stork.yaml:4:14: keep_out[0].bellow_mm: "bellow_mm" is not a key here; did you mean below_mm?',
    ],
  },
];
