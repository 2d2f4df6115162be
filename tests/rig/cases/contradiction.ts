import type { MistakeCase } from './case.ts';

/** Profiles that contradict themselves or their leader. */
export const CONTRADICTION_CASES: readonly MistakeCase[] = [
  {
    title: 'two joints of one name',
    rig: [['name: elbow', 'name: shoulder']],
    says: [
      'RIG_NAME_TWICE rig.yaml:13:15: leader.joints[1].name: shoulder is already the name of a joint; name each joint and button differently',
      'RIG_SOURCE_UNKNOWN stork.yaml:16:20: joints[1].from.elbow: the leader has no joint elbow; its joints are shoulder, shoulder',
    ],
  },
  {
    title: 'a joint and a button of one name',
    rig: [['name: pedal', 'name: elbow']],
    says: [
      'RIG_NAME_TWICE rig.yaml:15:15: leader.buttons[0].name: elbow is already the name of a joint; name each joint and button differently',
    ],
  },
  {
    title: 'two follower joints of one name',
    stork: [['  - name: elbow', '  - name: shoulder']],
    says: [
      'RIG_SERVO_MISSING stork.yaml:15:5: joints[1]: no servo turns shoulder; give it servo: { channel: 5, points: [[-90, 560], [90, 2440]] }, or an entry in servos:',
      'RIG_NAME_TWICE stork.yaml:15:11: joints[1].name: shoulder is already the name of a joint; name each joint differently',
      'RIG_JOINT_UNKNOWN stork.yaml:21:35: servos[0].turns.elbow: this follower has no joint elbow; its joints are shoulder, shoulder',
      'RIG_JOINT_UNKNOWN stork.yaml:22:38: poses.bow.elbow: this follower has no joint elbow; its joints are shoulder, shoulder',
    ],
  },
  {
    title: 'two followers of one name',
    rig: [['  - stork.yaml', '  - stork.yaml\n  - { like: stork.yaml, port: "tcp:there:7000" }']],
    says: [
      'RIG_NAME_TWICE rig.yaml:18:5: followers[1]: stork is named twice; name each differently; beside like:, write follower: with a name of its own',
    ],
  },
  {
    title: 'a follower called all',
    stork: [['follower: stork', 'follower: all']],
    says: [
      'RIG_NAME_RESERVED stork.yaml:1:11: follower: all stands for every follower in commands; choose another name',
    ],
  },
  {
    title: 'a pose called rest',
    stork: [['{ bow:', '{ rest:']],
    says: ['RIG_NAME_RESERVED stork.yaml:22:16: poses.rest: every arm has a pose rest already; choose another name'],
  },
  {
    title: 'a range upside down',
    stork: [['range_deg: [-60, 85]', 'range_deg: [85, -60]']],
    says: [
      'RIG_SPAN_ORDER stork.yaml:10:16: joints[0].range_deg: 85 to -60 degrees is no span; write the lower end first: [-60, 85]',
    ],
  },
  {
    title: 'counts upside down',
    rig: [['counts: [0, 1023]', 'counts: [1023, 0]']],
    says: [
      'RIG_SPAN_ORDER rig.yaml:6:11: leader.counts: 1023 to 0 counts is no span; write the lower end first: [0, 1023]',
    ],
  },
  {
    title: 'an empty travel',
    rig: [['travel_counts: [120, 880]', 'travel_counts: [120, 120]']],
    says: [
      'RIG_SPAN_ORDER rig.yaml:13:82: leader.joints[1].travel_counts: 120 to 120 counts is no span; give two different ends',
    ],
  },
  {
    title: 'points that turn back',
    rig: [['[911, 120]', '[911, -10]']],
    says: [
      'RIG_POINTS_ORDER rig.yaml:11:39: leader.joints[0].points[2]: -10 degrees turns back after 0; a map rises or falls, not both: mend or remove this point',
    ],
  },
  {
    title: 'points that repeat',
    rig: [['[911, 120]', '[512, 120]']],
    says: [
      'RIG_POINTS_ORDER rig.yaml:11:39: leader.joints[0].points[2]: 512 counts stands twice; a map rises or falls, not both: mend or remove this point',
    ],
  },
  {
    title: 'points beyond the converter',
    rig: [['[911, 120]', '[1911, 120]']],
    says: [
      'RIG_COUNTS_OUTSIDE rig.yaml:11:40: leader.joints[0].points[2][0]: 1911 is outside what the converter can read, 0 to 1023 counts; mend it, or widen counts (12 bits: [0, 4095]); a point is [counts, degrees]',
    ],
  },
  {
    title: 'points with their columns exchanged',
    rig: [['[112, -120]', '[-120, 112]']],
    says: [
      'RIG_COUNTS_OUTSIDE rig.yaml:11:17: leader.joints[0].points[0][0]: -120 is outside what the converter can read, 0 to 1023 counts; mend it, or widen counts (12 bits: [0, 4095]); a point is [counts, degrees]',
      'RIG_POINTS_ORDER rig.yaml:11:39: leader.joints[0].points[2]: 120 degrees turns back after 0; a map rises or falls, not both: mend or remove this point',
    ],
  },
  {
    title: 'travel beyond the converter',
    rig: [['travel_counts: [120, 880]', 'travel_counts: [120, 1100]']],
    says: [
      'RIG_COUNTS_OUTSIDE rig.yaml:13:88: leader.joints[1].travel_counts[1]: 1100 is outside what the converter can read, 0 to 1023 counts; mend it, or widen counts (12 bits: [0, 4095])',
    ],
  },
  {
    title: 'a button beyond the converter',
    rig: [['counts: 300', 'counts: 3000']],
    says: [
      'RIG_COUNTS_OUTSIDE rig.yaml:15:58: leader.buttons[0].counts: 3000 is outside what the converter can read, 0 to 1023 counts; mend it, or widen counts (12 bits: [0, 4095])',
    ],
  },
  {
    title: 'a button that is never pressed',
    rig: [['counts: 300', 'counts: 0']],
    says: [
      'RIG_BUTTON_NEVER rig.yaml:15:58: leader.buttons[0].counts: no reading is below 0 counts: the button could never be pressed; put the threshold between what it reads released and pressed',
    ],
  },
  {
    title: 'an even median',
    rig: [['despike: 3', 'despike: 4']],
    says: [
      'RIG_DESPIKE_EVEN rig.yaml:12:16: leader.joints[0].despike: despike 4 is even: a median needs a middle; use 3 or 5 readings; 1 is off',
    ],
  },
  {
    title: 'a source that the leader lacks',
    stork: [['from: shoulder', 'from: sholder']],
    says: [
      'RIG_SOURCE_UNKNOWN stork.yaml:9:11: joints[0].from: the leader has no joint sholder; did you mean shoulder?',
    ],
  },
  {
    title: 'a weighted source that the leader lacks',
    stork: [['elbow: 1, shoulder: -0.5', 'wrist: 1']],
    says: [
      'RIG_SOURCE_UNKNOWN stork.yaml:16:20: joints[1].from.wrist: the leader has no joint wrist; its joints are shoulder, elbow',
    ],
  },
  {
    title: 'a pose of an unknown joint',
    stork: [['{ shoulder: 40, elbow: -30 }', '{ sholder: 40 }']],
    says: [
      'RIG_JOINT_UNKNOWN stork.yaml:22:26: poses.bow.sholder: this follower has no joint sholder; did you mean shoulder?',
    ],
  },
  {
    title: 'a servo of an unknown joint',
    stork: [['turns: { elbow: 1 }', 'turns: { elbow: 1, wrist: 1 }']],
    says: [
      'RIG_JOINT_UNKNOWN stork.yaml:21:45: servos[0].turns.wrist: this follower has no joint wrist; its joints are shoulder, elbow',
    ],
  },
  {
    title: 'stretch over two sources',
    stork: [['range_deg: [-50, 5]', 'range_deg: [-50, 5]\n    stretch: true']],
    says: [
      'RIG_STRETCH_SOURCES stork.yaml:18:14: joints[1].stretch: stretch needs one plain leader joint; write from: with one leader joint (direction: reversed turns it round), or use gain and offset_deg',
    ],
  },
  {
    title: 'stretch without a source',
    stork: [['    from: shoulder\n', '    stretch: true\n']],
    says: [
      'RIG_STRETCH_SOURCES stork.yaml:9:14: joints[0].stretch: stretch has no leader joint to lay over the range; write from: with one leader joint (direction: reversed turns it round), or use gain and offset_deg',
    ],
  },
  {
    title: 'a joint without a servo',
    stork: [['    servo: { channel: 5, points: [[-90, 560], [90, 2440]] }\n', '']],
    says: [
      'RIG_SERVO_MISSING stork.yaml:8:5: joints[0]: no servo turns shoulder; give it servo: { channel: 5, points: [[-90, 560], [90, 2440]] }, or an entry in servos:',
    ],
  },
  {
    title: 'a coupled servo that turns nothing',
    stork: [['turns: { elbow: 1 }', 'turns: {}']],
    says: [
      'RIG_SERVO_MISSING stork.yaml:15:5: joints[1]: no servo turns elbow; give it servo: { channel: 5, points: [[-90, 560], [90, 2440]] }, or an entry in servos:',
      'RIG_SERVO_MISSING stork.yaml:21:26: servos[0].turns: this servo turns no joint; name the joints it turns, such as { shoulder: 1 }',
    ],
  },
  {
    title: 'a joint with both kinds of servo',
    stork: [['turns: { elbow: 1 }', 'turns: { elbow: 1, shoulder: 0.1 }']],
    says: [
      'RIG_SERVO_BOTH stork.yaml:14:12: joints[0].servo: shoulder has servo: and is turned by servos: too; keep one of the two',
    ],
  },
  {
    title: 'a range beyond its servo',
    stork: [['range_deg: [-60, 85]', 'range_deg: [-95, 85]']],
    says: [
      'RIG_RANGE_BEYOND_SERVO stork.yaml:10:17: joints[0].range_deg[0]: range_deg -95 is beyond the servo points, which span -90 to 90 degrees; keep range_deg within -90 to 90, or measure points further out',
    ],
  },
  {
    title: 'ranges whose sum is beyond their servo',
    stork: [['turns: { elbow: 1 }', 'turns: { elbow: 2 }']],
    says: [
      "RIG_RANGE_BEYOND_SERVO stork.yaml:21:26: servos[0].turns: the joints' ranges ask for -100 to 10 degrees, beyond the servo points, which span -90 to 90 degrees; narrow range_deg of these joints, or measure points further out",
    ],
  },
  {
    title: 'rest outside the range',
    stork: [['rest_deg: -20', 'rest_deg: -70']],
    says: [
      'RIG_REST_OUTSIDE stork.yaml:13:15: joints[0].rest_deg: rest_deg -70 is outside range_deg, -60 to 85 degrees; give rest_deg an angle within -60 to 85',
    ],
  },
  {
    title: 'an absent rest outside the range',
    stork: [['range_deg: [-50, 5]', 'range_deg: [-50, -5]']],
    says: [
      'RIG_REST_OUTSIDE stork.yaml:15:5: joints[1]: rest_deg 0 is outside range_deg, -50 to -5 degrees; give rest_deg an angle within -50 to -5',
    ],
  },
  {
    title: 'a pose outside the range',
    stork: [['elbow: -30', 'elbow: -51']],
    says: [
      'RIG_POSE_OUTSIDE stork.yaml:22:38: poses.bow.elbow: -51 is outside the range of elbow, -50 to 5 degrees; give an angle within -50 to 5',
    ],
  },
];
