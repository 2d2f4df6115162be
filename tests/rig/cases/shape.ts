import type { MistakeCase } from './case.ts';

/** Keys and values that the schema refuses. */
export const SHAPE_CASES: readonly MistakeCase[] = [
  {
    title: 'an unknown key',
    rig: [['despike: 3', 'despyke: 3']],
    says: [
      'RIG_KEY_UNKNOWN rig.yaml:12:7: leader.joints[0].despyke: "despyke" is not a key here; did you mean despike?',
    ],
  },
  {
    title: 'an unknown key that is near no other',
    stork: [['rate_hz: 50', 'colour: red']],
    says: [
      'RIG_KEY_UNKNOWN stork.yaml:4:1: colour: "colour" is not a key here; known keys are follower, port, wire, board, rate_hz, follow, tip, join, wake, stop_category, power, on_lost_pulse, joints, servos, poses, tip_speed_mm_s, load, moving_load, arm, keep_out, supply',
    ],
  },
  {
    title: 'a misspelt key that had to be there',
    stork: [['    range_deg: [-60, 85]', '    rnage_deg: [-60, 85]']],
    says: [
      'RIG_KEY_UNKNOWN stork.yaml:10:5: joints[0].rnage_deg: "rnage_deg" is not a key here; did you mean range_deg?',
    ],
  },
  {
    title: 'a missing key',
    stork: [['    range_deg: [-60, 85]\n', '']],
    says: [
      'RIG_KEY_MISSING stork.yaml:8:5: joints[0]: range_deg is missing; give the angles it may have, [lowest, highest] degrees',
    ],
  },
  {
    title: 'a missing port',
    stork: [['port: serial:/dev/stork?baud=57600\n', '']],
    says: [
      'RIG_KEY_MISSING stork.yaml:1:1: (file): port is missing; give the address of the port, such as serial:/dev/ttyACM0?baud=115200, tcp:host:port, udp:host:port or sim:arm',
    ],
  },
  {
    title: 'a missing leader',
    rig: [['leader:\n  leader: hand', 'x:\n  leader: hand']],
    says: [
      'RIG_KEY_MISSING rig.yaml:1:1: (file): leader is missing; give the leader: the path of its profile, relative to this file, or the profile itself',
      'RIG_KEY_UNKNOWN rig.yaml:2:1: x: "x" is not a key here; known keys are rig, leader, unison, pace, followers',
    ],
  },
  {
    title: 'a text for a number',
    stork: [['rate_hz: 50', 'rate_hz: fast']],
    says: [
      'RIG_VALUE_TYPE stork.yaml:4:10: rate_hz: rate_hz is the text "fast"; give a number: commands a second, in hertz',
    ],
  },
  {
    title: 'a broken number for a whole one',
    rig: [['channel: 1\n', 'channel: 1.5\n']],
    says: [
      'RIG_VALUE_TYPE rig.yaml:10:16: leader.joints[0].channel: channel is 1.5; give a whole number: the input of the board, counted from 0: 1 for A1, or for the second number of a line',
    ],
  },
  {
    title: 'an empty value',
    rig: [['  port: serial:/dev/hand?baud=115200', '  port:']],
    says: [
      'RIG_VALUE_TYPE rig.yaml:4:8: leader.port: port is empty; give a text: the address of the port, such as serial:/dev/ttyACM0?baud=115200, tcp:host:port, udp:host:port or sim:arm',
    ],
  },
  {
    title: 'a number that is none',
    stork: [['rate_hz: 50', 'rate_hz: .nan']],
    says: ['RIG_VALUE_TYPE stork.yaml:4:10: rate_hz: rate_hz is NaN; give a number: commands a second, in hertz'],
  },
  {
    title: 'a value for a map',
    stork: [['join: { speed: 0.25, meet: move }', 'join: 0.25']],
    says: ['RIG_VALUE_TYPE stork.yaml:5:7: join: join is 0.25; give keys with values: how it joins the leader'],
  },
  {
    title: 'a wrong kind for a choice of kinds',
    stork: [['wire: firmata', 'wire: 5']],
    says: [
      'RIG_VALUE_TYPE stork.yaml:3:7: wire: wire is 5; give what is spoken on the port: lines, frames, firmata, or { lines: { ... } } with options',
    ],
  },
  {
    title: 'a rate below its bounds',
    stork: [['rate_hz: 50', 'rate_hz: 0.5']],
    says: ['RIG_VALUE_BOUNDS stork.yaml:4:10: rate_hz: rate_hz is 0.5; give at least 1: commands a second, in hertz'],
  },
  {
    title: 'a speed of nothing',
    stork: [['rest_deg: -20\n', 'rest_deg: -20\n    gain: 0\n']],
    says: [
      'RIG_VALUE_BOUNDS stork.yaml:14:11: joints[0].gain: gain is 0; give more than 0: how far it turns for one degree of the leader, above 0',
    ],
  },
  {
    title: 'a share above one',
    stork: [['speed: 0.25', 'speed: 1.5']],
    says: [
      'RIG_VALUE_BOUNDS stork.yaml:5:16: join.speed: speed is 1.5; give at most 1: the share of the speed limits while joining, above 0, at most 1',
    ],
  },
  {
    title: 'a pace beyond 100',
    rig: [['rig: yard', 'rig: yard\npace: 120']],
    says: [
      'RIG_VALUE_BOUNDS rig.yaml:2:7: pace: pace is 120; give at most 100: the percentage of every speed limit at the start',
    ],
  },
  {
    title: 'a weight of zero',
    stork: [['shoulder: -0.5', 'shoulder: 0']],
    says: [
      'RIG_VALUE_BOUNDS stork.yaml:16:33: joints[1].from.shoulder: the weight of shoulder is 0; give another weight, or remove it',
    ],
  },
  {
    title: 'a servo weight of zero',
    stork: [['turns: { elbow: 1 }', 'turns: { elbow: 0 }']],
    says: [
      'RIG_VALUE_BOUNDS stork.yaml:21:35: servos[0].turns.elbow: the weight of elbow is 0; give another weight, or remove it',
    ],
  },
  {
    title: 'a misspelt choice',
    stork: [['meet: move', 'meet: mov']],
    says: ['RIG_VALUE_CHOICE stork.yaml:5:28: join.meet: meet is the text "mov"; did you mean move? One of move, wait'],
  },
  {
    title: 'a choice that is near none',
    stork: [['stop_category: 2', 'stop_category: 7']],
    says: ['RIG_VALUE_CHOICE stork.yaml:6:16: stop_category: stop_category is 7; choose one of 0, 1, 2'],
  },
  {
    title: 'a misspelt wire',
    stork: [['wire: firmata', 'wire: firmatta']],
    says: [
      'RIG_VALUE_CHOICE stork.yaml:3:7: wire: wire is the text "firmatta"; did you mean firmata? One of lines, frames, firmata',
    ],
  },
  {
    title: 'one point',
    rig: [['points: [[112, -120], [512, 0], [911, 120]]', 'points: [[112, -120]]']],
    says: [
      'RIG_LIST_LENGTH rig.yaml:11:15: leader.joints[0].points: points has 1 entry; give at least 2: two or more measured pairs [counts, degrees], rising or falling, such as [[112, -120], [911, 120]]',
    ],
  },
  {
    title: 'a pair of three',
    stork: [['range_deg: [-50, 5]', 'range_deg: [-50, 5, 6]']],
    says: [
      'RIG_LIST_LENGTH stork.yaml:17:16: joints[1].range_deg: range_deg has 3 entries; give at most 2: the angles it may have, [lowest, highest] degrees',
    ],
  },
  {
    title: 'an empty map of sources',
    stork: [['from: { elbow: 1, shoulder: -0.5 }', 'from: {}']],
    says: [
      'RIG_LIST_LENGTH stork.yaml:16:11: joints[1].from: from names no joint; name one, or remove from: to keep it at rest_deg',
    ],
  },
  {
    title: 'a name with a capital',
    rig: [['rig: yard', 'rig: Yard']],
    says: [
      'RIG_NAME_SHAPE rig.yaml:1:6: rig: "Yard" cannot be a name; use a lower-case name of a-z, 0-9, _ and - that begins with a letter',
    ],
  },
  {
    title: 'a name that is a key',
    stork: [['poses: { bow:', 'poses: { "bow 2":']],
    says: [
      'RIG_NAME_SHAPE stork.yaml:22:10: poses["bow 2"]: "bow 2" cannot be a name; use a lower-case name of a-z, 0-9, _ and - that begins with a letter',
    ],
  },
];
