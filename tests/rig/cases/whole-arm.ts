import type { MistakeCase } from './case.ts';

type Edit = readonly [string, string];

/** Shoulder 100 mm above the floor, 300 mm and 200 mm of arm; turning is right-handed about y, so forward is positive. */
const ARM = `arm:
  base: { height_mm: 100 }
  links:
    - { joint: shoulder, axis: y, to_mm: [0, 0, 300] }
    - { joint: elbow, axis: y, to_mm: [0, 0, 200] }
`;
const armed: Edit = ['poses:', `${ARM}poses:`];
const asked = (line: string): Edit => ['rate_hz: 50', line];

export const WHOLE_ARM_CASES: readonly MistakeCase[] = [
  {
    title: 'a rest pose inside a keep-out',
    // At rest the shoulder leans back by 20 degrees: its end stands at x = -300 sin 20 = -103 mm, z = 100 + 300 cos 20 = 382 mm
    // and the tip at -171, 570. The box reaches 11 mm past the elbow at most, whichever way it shrinks.
    stork: [armed, asked('keep_out: [{ box_mm: [[-114, -50, 371], [-92, 50, 393]] }]')],
    says: [
      'RIG_POSE_KEPT_OUT stork.yaml:8:3: joints: the rest pose is inside a keep-out, by 11 mm; move the pose or the keep-out; both are in the base’s level frame',
    ],
  },
  {
    title: 'a named pose below the floor',
    // Shoulder 85, elbow 5: both links level, 90 degrees from upright after the shoulder's 85; the tip of the second
    // link stands at 100 + 300 cos 85 = 126 mm; a floor at 130 mm cuts 4 mm off, and the shoulder is 30 mm below it.
    stork: [
      ['{ bow: { shoulder: 40, elbow: -30 } }', '{ bow: { shoulder: 85, elbow: 5 }, up: {} }'],
      armed,
      asked('keep_out: [{ box_mm: [[400, -50, 0], [600, 50, 130]] }]'),
    ],
    says: [
      'RIG_POSE_KEPT_OUT stork.yaml:27:15: poses.bow: the pose bow is inside a keep-out, by 4 mm; move the pose or the keep-out; both are in the base’s level frame',
    ],
  },
  {
    title: 'a rest pose in the clearance of a keep-out',
    // The tip at rest stands at x = -171, z = 570 mm, as above, and the link leads away from the box, 5 mm behind it.
    stork: [armed, asked('keep_out: [{ box_mm: [[-400, -50, 500], [-176, 50, 640]], clearance_mm: 8 }]')],
    says: [
      'RIG_POSE_KEPT_OUT stork.yaml:8:3: joints: the rest pose is inside a keep-out, by 3 mm; move the pose or the keep-out; both are in the base’s level frame',
    ],
  },
  {
    title: 'a load limit of an arm without motors',
    stork: [armed, asked('load: limit\nmoving_load: limit')],
    says: [
      'RIG_MOTOR_MISSING stork.yaml:4:7: load: load: limit without any motor limits nothing; give links their motor: { stall_nm: 6 }, from the data sheet',
      'RIG_MOTOR_MISSING stork.yaml:5:14: moving_load: moving_load: limit without any motor limits nothing; give links their motor: { stall_nm: 6 }, from the data sheet',
    ],
  },
  {
    title: 'a rest pose over its load',
    // Shoulder at -20 degrees: 1 kg, 150 mm up the link, leans 150 sin 20 = 51.3 mm back: 9.80665 * 0.0513 = 0.5031 Nm,
    // 167.7 % of 0.3 * 1 Nm held. (With no drag, moving it is 100.6 % of 0.5 Nm.)
    stork: [
      [
        'poses:',
        'arm: { links: [{ joint: shoulder, axis: y, to_mm: [0, 0, 300], mass_g: 1000, motor: { stall_nm: 1 } }] }\nposes:',
      ],
      asked('load: limit'),
    ],
    says: [
      'RIG_REST_OVERLOAD stork.yaml:13:15: joints[0].rest_deg: the rest pose loads shoulder to 168 % of what its motor may give, and load: limit allows 100; rest lower, balance the arm, or give it a stronger motor',
    ],
  },
  {
    title: 'follow: tip of a leader whose geometry is not known',
    stork: [armed, asked('follow: tip')],
    says: [
      'RIG_TIP_LEADER stork.yaml:4:9: follow: follow: tip needs the geometry of hand, whose file gives no arm; give arm: with its links in the leader file, or use follow: joints',
    ],
  },
  {
    title: 'follow: tip of an arm that only twists',
    rig: [['  buttons:', '  arm: { links: [{ joint: shoulder, axis: y, to_mm: [0, 0, 40] }] }\n  buttons:']],
    stork: [
      ['poses:', 'arm: { links: [{ joint: shoulder, axis: z, to_mm: [0, 0, 40] }] }\nposes:'],
      asked('follow: tip'),
    ],
    says: [
      'RIG_TIP_STILL stork.yaml:4:9: follow: follow: tip, and no joint of this arm moves its tip; give links to the joints that reach, or use follow: joints',
    ],
  },
  {
    title: 'a tip that grows to nothing',
    stork: [asked('tip: { scale: 0, origin_m: [0, 0, 0] }')],
    says: [
      'RIG_VALUE_BOUNDS stork.yaml:4:15: tip.scale: scale is 0; give more than 0: its lengths for one of the leader’s, above 0; absent: the ratio of their reaches',
      'RIG_KEY_UNKNOWN stork.yaml:4:18: tip.origin_m: "origin_m" is not a key here; did you mean origin_mm?',
    ],
  },
];
