import type { MistakeCase } from './case.ts';

/** Files that cannot be read, are no YAML, or are of another kind than their place asks for. */
export const READING_CASES: readonly MistakeCase[] = [
  {
    title: 'a root file that is not there',
    files: {},
    file: 'nope.yaml',
    says: ['RIG_FILE_MISSING nope.yaml:1:1: (file): there is no file nope.yaml; mend the path'],
  },
  {
    title: 'a file that is neither rig nor profile',
    files: { 'x.yaml': 'colour: red\n' },
    file: 'x.yaml',
    says: [
      'RIG_KIND x.yaml:1:1: (file): this is neither a rig nor a profile; begin it with rig:, leader: or follower: and a name',
    ],
  },
  {
    title: 'an empty file',
    files: { 'x.yaml': '' },
    file: 'x.yaml',
    says: [
      'RIG_KIND x.yaml:1:1: (file): this is neither a rig nor a profile; begin it with rig:, leader: or follower: and a name',
    ],
  },
  {
    title: 'a file of comments',
    files: { 'x.yaml': '# nothing yet\n' },
    file: 'x.yaml',
    says: [
      'RIG_KIND x.yaml:1:1: (file): this is neither a rig nor a profile; begin it with rig:, leader: or follower: and a name',
    ],
  },
  {
    title: 'a file that is a list',
    files: { 'x.yaml': '- rig: yard\n' },
    file: 'x.yaml',
    says: [
      'RIG_KIND x.yaml:1:1: (file): this is neither a rig nor a profile; begin it with rig:, leader: or follower: and a name',
    ],
  },
  {
    title: 'a quote that is never closed',
    files: { 'x.yaml': 'rig: yard\nleader: "hand.yaml\n' },
    file: 'x.yaml',
    says: [
      'RIG_YAML_SYNTAX x.yaml:3:1: (file): this is not YAML: Missing closing "quote; mend the text here or just before',
    ],
  },
  {
    title: 'a tab for indentation',
    files: { 'x.yaml': 'leader: hand\njoints:\n	- { name: a }\n' },
    file: 'x.yaml',
    says: [
      'RIG_YAML_SYNTAX x.yaml:3:1: (file): this is not YAML: Tabs are not allowed as indentation; mend the text here or just before',
    ],
  },
  {
    title: 'a bracket that is never closed',
    files: { 'x.yaml': 'leader: hand\ncounts: [0, 1023\nwire: lines\n' },
    file: 'x.yaml',
    says: [
      'RIG_YAML_SYNTAX x.yaml:3:1: (file): this is not YAML: Flow sequence in block collection must be sufficiently indented and end with a ]; mend the text here or just before',
    ],
  },
  {
    title: 'a tag',
    files: { 'x.yaml': 'leader: !left hand\n' },
    file: 'x.yaml',
    says: [
      'RIG_YAML_SYNTAX x.yaml:1:9: (file): this is not YAML: Unresolved tag: !left; mend the text here or just before',
    ],
  },
  {
    title: 'a key that is a list',
    files: {
      'x.yaml':
        'leader: hand\nport: sim:hand\nwire: frames\njoints: [{ name: a, channel: 0, points: [[0, 0], [9, 9]] }]\n? [1, 2]\n: 3\n',
    },
    file: 'x.yaml',
    says: ['RIG_YAML_SYNTAX x.yaml:5:3: (file): this key is not a plain word; write key: value'],
  },
  {
    title: 'a key twice',
    stork: [['rate_hz: 50', 'rate_hz: 50\nrate_hz: 40']],
    says: ['RIG_YAML_KEY_TWICE stork.yaml:5:1: (file): this key stands twice in one map; keep one of the two'],
  },
  {
    title: 'an alias',
    stork: [
      [
        'servo: { channel: 5, points: [[-90, 560], [90, 2440]] }',
        'servo: { channel: 5, points: &p [[-90, 560], [90, 2440]] }',
      ],
      ['turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]]', 'turns: { elbow: 1 }, points: *p'],
    ],
    says: [
      'RIG_YAML_ALIAS stork.yaml:21:48: servos[0].points: *p is an alias; write the value out, or build on another profile with like:',
    ],
  },
  {
    title: 'a merge key',
    stork: [['rate_hz: 50', '<<: { rate_hz: 40 }']],
    says: [
      'RIG_YAML_ALIAS stork.yaml:4:1: ["<<"]: << merges by alias; write the values out, or build on another profile with like:',
    ],
  },
  {
    title: 'two documents',
    stork: [
      ['poses:', '# poses\nposes:'],
      ['{ bow: { shoulder: 40, elbow: -30 } }', '{}\n---\nfollower: heron'],
    ],
    says: [
      'RIG_YAML_DOCUMENTS stork.yaml:25:1: (file): a second document begins here; keep one rig or profile in a file',
    ],
  },
  {
    title: 'a folder for a file',
    file: 'x.yaml',
    fault: { fault: 'unreadable', detail: 'it is not a file' },
    says: [
      'RIG_FILE_UNREADABLE x.yaml:1:1: (file): x.yaml cannot be read: it is not a file; name a text file that may be read',
    ],
  },
  {
    title: 'a file that is too large',
    file: 'x.yaml',
    fault: { fault: 'too large', detail: 'it has 9999999 bytes' },
    says: [
      'RIG_FILE_UNREADABLE x.yaml:1:1: (file): x.yaml cannot be read: it has 9999999 bytes; a rig or profile has at most 1048576 bytes',
    ],
  },
  {
    title: 'a file that is not there',
    rig: [['- stork.yaml', '- ../stork.yaml']],
    says: [
      'RIG_FILE_MISSING rig.yaml:17:5: followers[0]: there is no file ../stork.yaml; mend the path: it is relative to rig.yaml',
    ],
  },
  {
    title: 'a follower where a leader belongs',
    rig: [['- stork.yaml', '- stork.yaml\n  - other.yaml']],
    says: [
      'RIG_KIND rig.yaml:18:5: followers[1]: other.yaml is a leader file; name a follower file, one that begins with follower:',
    ],
  },
  {
    title: 'a number where a profile belongs',
    rig: [['- stork.yaml', '- 5']],
    says: ['RIG_VALUE_TYPE rig.yaml:17:5: followers[0]: this is 5; give the path of a follower file'],
  },
  {
    title: 'a file that leads back to itself',
    rig: [['- stork.yaml', '- circle.yaml']],
    says: [
      'RIG_INCLUDE_CYCLE round.yaml:1:7: like: circle.yaml leads in a circle: rig.yaml -> circle.yaml -> round.yaml -> circle.yaml; write the values into one file of the circle',
    ],
  },
];
