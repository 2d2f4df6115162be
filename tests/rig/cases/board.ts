import type { MistakeCase } from './case.ts';

/** What boards, wires and ports cannot do. */
export const BOARD_CASES: readonly MistakeCase[] = [
  {
    title: 'two leader joints on one channel',
    rig: [['channel: 2', 'channel: 1']],
    says: [
      'RIG_CHANNEL_TWICE rig.yaml:13:31: leader.joints[1].channel: channel 1 of elbow is already that of shoulder; give each its own channel',
    ],
  },
  {
    title: "a button on a joint's channel",
    rig: [['channel: 6', 'channel: 2']],
    says: [
      'RIG_CHANNEL_TWICE rig.yaml:15:31: leader.buttons[0].channel: channel 2 of pedal is already that of elbow; give each its own channel',
    ],
  },
  {
    title: 'two servos on one channel',
    stork: [['channel: 7', 'channel: 5']],
    says: [
      'RIG_CHANNEL_TWICE stork.yaml:21:16: servos[0].channel: channel 5 of the servo of elbow is already that of shoulder; give each its own channel',
    ],
  },
  {
    title: "power on a servo's channel",
    stork: [['stop_category: 2', 'stop_category: 1\npower: { channel: 5 }']],
    says: [
      'RIG_CHANNEL_TWICE stork.yaml:7:19: power.channel: channel 5 of power is already that of shoulder; give each its own channel',
    ],
  },
  {
    title: 'one port with overlapping channels',
    rig: [['  - stork.yaml', '  - stork.yaml\n  - { like: stork.yaml, follower: twin }']],
    says: [
      'RIG_CHANNEL_TWICE rig.yaml:18:5: followers[1]: channel 5 for shoulder of twin is already that of shoulder of stork, on the same port; give each its own channel, or each follower its own port',
      'RIG_CHANNEL_TWICE rig.yaml:18:5: followers[1]: channel 7 for the servo of elbow of twin is already that of the servo of elbow of stork, on the same port; give each its own channel, or each follower its own port',
    ],
  },
  {
    title: 'a channel that the wire lacks',
    rig: [
      ['wire: lines', 'wire: firmata'],
      ['channel: 6', 'channel: 16'],
    ],
    says: [
      'RIG_CHANNEL_RANGE rig.yaml:15:31: leader.buttons[0].channel: firmata has no channel 16 here; use a channel from 0 to 15',
    ],
  },
  {
    title: 'a servo channel that the wire lacks',
    stork: [['channel: 5', 'channel: 128']],
    says: [
      'RIG_CHANNEL_RANGE stork.yaml:14:23: joints[0].servo.channel: firmata has no channel 128 here; use a channel from 0 to 127',
    ],
  },
  {
    title: 'more servos than the wire drives',
    stork: [
      [
        'servos:\n',
        'servos:\n  - { channel: 20, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 21, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 22, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 23, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 24, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 25, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 26, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 27, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 28, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 29, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 30, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 31, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 32, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 33, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 34, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 35, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 36, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 37, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 38, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 39, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 40, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 41, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 42, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 43, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 44, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 45, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 46, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 47, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 48, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 49, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 50, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 51, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 52, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 53, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 54, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 55, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 56, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 57, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 58, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 59, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 60, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 61, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 62, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 63, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 64, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 65, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 66, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n  - { channel: 67, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }\n',
      ],
    ],
    says: [
      'RIG_RATE_TOO_HIGH stork.yaml:4:10: rate_hz: 294 bytes 50 times a second are 147000 bits a second, and the port carries 57600; lower rate_hz to 19 or less, or raise the baud on the board and here',
      'RIG_SERVOS_MANY stork.yaml:8:3: joints: 50 servos are more than firmata can drive; hang at most 48 on one follower, and the rest on another',
    ],
  },
  // Servo.write() takes a value below MIN_PULSE_WIDTH, 544, for degrees: arduino-libraries/Servo, src/avr/Servo.cpp.
  {
    title: 'a pulse that firmata takes for degrees',
    stork: [['[[-90, 560], [90, 2440]] }\n  - name', '[[-90, 500], [90, 2440]] }\n  - name']],
    says: [
      'RIG_PULSE_BOUNDS stork.yaml:14:41: joints[0].servo.points[0][1]: 500 us is a pulse that firmata cannot carry safely: the board would take it for degrees; keep pulses within 544 to 2912 us; a point is [degrees, microseconds]',
    ],
  },
  {
    title: 'a pulse that is too long',
    stork: [['[[-90, 560], [90, 2440]] }\n  - name', '[[-90, 560], [90, 3000]] }\n  - name']],
    says: [
      'RIG_PULSE_BOUNDS stork.yaml:14:52: joints[0].servo.points[1][1]: 3000 us is a pulse that firmata cannot carry safely; keep pulses within 544 to 2912 us; a point is [degrees, microseconds]',
    ],
  },
  {
    title: 'servo points with their columns exchanged',
    stork: [
      ['[[-90, 560], [90, 2440]] }\n  - name', '[[560, -90], [2440, 90]] }\n  - name'],
      ['range_deg: [-60, 85]', 'range_deg: [560, 600]'],
      ['rest_deg: -20', 'rest_deg: 560'],
      ['shoulder: 40', 'shoulder: 560'],
    ],
    says: [
      'RIG_PULSE_BOUNDS stork.yaml:14:41: joints[0].servo.points[0][1]: -90 us is a pulse that firmata cannot carry safely: the board would take it for degrees; keep pulses within 544 to 2912 us; a point is [degrees, microseconds]',
    ],
  },
  // attach() keeps (544 - min) / 4 and (2400 - max) / 4 in an int8_t (arduino-libraries/Servo, src/avr/Servo.cpp), so
  // (computed) min is at most 544 + 4 * 128 + 3 = 1059 and max at least 2400 - 4 * 127 - 3 = 1889.
  {
    title: 'limits that the AVR library cannot hold',
    stork: [['[[-90, 560], [90, 2440]] }\n  - name', '[[-90, 1060], [90, 1940]] }\n  - name']],
    says: [
      'RIG_SERVO_LIMITS stork.yaml:14:34: joints[0].servo.points: the AVR servo library cannot hold 1060 to 1940 us as limits; measure outer points at most 1059 us and at least 1889 us, or use another wire',
    ],
  },
  {
    title: 'upper limits that the AVR library cannot hold',
    stork: [['[[-90, 560], [90, 2440]] }\n  - name', '[[-90, 800], [90, 1888]] }\n  - name']],
    says: [
      'RIG_SERVO_LIMITS stork.yaml:14:34: joints[0].servo.points: the AVR servo library cannot hold 800 to 1888 us as limits; measure outer points at most 1059 us and at least 1889 us, or use another wire',
    ],
  },
  {
    title: 'a stop that removes power without power',
    stork: [['stop_category: 2', 'stop_category: 1']],
    says: [
      'RIG_POWER_MISSING stork.yaml:6:16: stop_category: stop_category 1 removes power, and nothing here can: ending the pulses does not; give power: { channel: 7, on: high }, or use stop_category: 2',
    ],
  },
  {
    title: 'power that lines cannot switch',
    stork: [['wire: firmata', 'wire: { lines: { template: "{shoulder.us},{elbow.us}\\n" } }\npower: { channel: 9 }']],
    says: [
      'RIG_POWER_UNABLE stork.yaml:4:8: power: on lines the board switches power by its own texts, and they are missing; give wire: { lines: { power_on: "...", power_off: "..." } } as its sketch reads them',
    ],
  },
  {
    title: 'power that lines can only switch on',
    stork: [['wire: firmata', 'wire: { lines: { template: "{shoulder.us},{elbow.us}\\n", power_on: "P1\\n" } }']],
    says: [
      'RIG_POWER_UNABLE stork.yaml:3:16: wire.lines: power_on and power_off belong together; give both, or neither',
    ],
  },
  {
    title: 'an address of an unknown kind',
    rig: [['port: serial:/dev/hand?baud=115200', 'port: serail:/dev/hand']],
    says: ['RIG_ADDRESS rig.yaml:4:9: leader.port: serail:/dev/hand: unknown kind of port "serail"; serial:/dev/hand'],
  },
  {
    title: 'a simulated arm that leads',
    rig: [['port: serial:/dev/hand?baud=115200', 'port: sim:arm']],
    says: ['RIG_ADDRESS_END rig.yaml:4:9: leader.port: a simulated arm cannot lead; use sim:hand'],
  },
  {
    title: 'a simulated hand that follows',
    stork: [['port: serial:/dev/stork?baud=57600', 'port: sim:hand']],
    says: ['RIG_ADDRESS_END stork.yaml:2:7: port: a simulated hand cannot follow; use sim:arm'],
  },
  {
    title: 'one port with two wires',
    rig: [['port: serial:/dev/hand?baud=115200', 'port: serial:/dev/stork?baud=57600']],
    says: [
      'RIG_PORT_DIFFERS rig.yaml:17:5: followers[0]: stork says wire firmata of a port of which hand says lines; one port is one board: say the same in both, or use another port',
    ],
  },
  {
    title: 'one port with two rates',
    rig: [
      ['port: serial:/dev/hand?baud=115200', 'port: serial:/dev/stork?baud=115200'],
      ['wire: lines', 'wire: firmata'],
    ],
    says: [
      'RIG_PORT_DIFFERS rig.yaml:17:5: followers[0]: stork says baud 57600 of a port of which hand says 115200; one port is one board: say the same in both, or use another port',
    ],
  },
  {
    title: 'one port with two board names',
    rig: [
      ['port: serial:/dev/hand?baud=115200', 'port: serial:/dev/stork\n  board: left'],
      ['wire: lines', 'wire: firmata'],
    ],
    stork: [['wire: firmata', 'wire: firmata\nboard: right']],
    says: [
      'RIG_PORT_DIFFERS rig.yaml:18:5: followers[0]: stork says board right of a port of which hand says left; one port is one board: say the same in both, or use another port',
    ],
  },
  {
    title: 'lines without a template',
    stork: [['wire: firmata', 'wire: lines']],
    says: [
      'RIG_TEMPLATE_MISSING stork.yaml:3:7: wire: a follower on lines needs a template; give the line its sketch reads: wire: { lines: { template: "{shoulder.us},{elbow.us}\\n" } }',
    ],
  },
  {
    title: 'a template with an unknown joint',
    stork: [['wire: firmata', 'wire: { lines: { template: "{sholder.us},{elbow.us}\\n" } }']],
    says: ['RIG_TEMPLATE stork.yaml:3:28: wire.lines.template: there is no "sholder" to send; known: shoulder, elbow'],
  },
  {
    title: 'a template that leaves a servo out',
    stork: [['wire: firmata', 'wire: { lines: { template: "{elbow.us}\\n" } }']],
    says: [
      'RIG_TEMPLATE stork.yaml:3:28: wire.lines.template: servo 5 of shoulder is never sent; add {5.us} or {shoulder.deg}',
    ],
  },
  {
    title: 'a limp text with a line end that is none',
    stork: [['wire: firmata', 'wire: { lines: { template: "{shoulder.us},{elbow.us}\\n", limp: \'off\\n\' } }']],
    says: [
      'RIG_TEMPLATE stork.yaml:3:64: wire.lines.limp: "\\n" is two characters here; write the text in double quotes',
    ],
  },
  ...['{shoulder.us},{elbow.us}', '{shoulder.us}}}{elbow.deg:2}'].map((template) => ({
    title: `a template that ends in a number: ${template}`,
    stork: [['wire: firmata', `wire: { lines: { template: "${template}" } }`] as const],
    says: [
      'RIG_TEMPLATE stork.yaml:3:28: wire.lines.template: the line ends in a number, and the sketch cannot tell where it is whole; end the template with "\\n", in double quotes',
    ],
  })),
  ...['-', '5', '_', '*', 'é'].map((separator) => ({
    title: `a separator that a number or a name may contain: ${separator}`,
    rig: [['wire: lines', `wire: { lines: { separator: "${separator}" } }`] as const],
    says: [
      `RIG_SEPARATOR rig.yaml:5:31: leader.wire.lines.separator: "${separator}" may stand in a number, a name or a checksum; use one sign such as ";" "," "|" or " "`,
    ],
  })),
  {
    title: 'one UDP board that is to answer to two ports',
    rig: [
      ['serial:/dev/hand?baud=115200', 'udp:Arms.local:7000?local=7001'],
      ['wire: lines', 'wire: frames'],
    ],
    stork: [
      ['serial:/dev/stork?baud=57600', 'udp:arms.local:7000'],
      ['wire: firmata', 'wire: frames'],
    ],
    says: [
      'RIG_PORT_DIFFERS rig.yaml:17:5: followers[0]: stork says local port any of a port of which hand says 7001; one port is one board: say the same in both, or use another port',
    ],
  },
  // Two servos of one Firmata analog message each, 3 bytes (firmata/protocol, protocol.md), 10 bits a byte (8N1):
  // 6 * 10 * 50 = 3000 bits a second, and 2400 / 60 = 40 Hz fits.
  {
    title: 'a frame that does not fit its baud',
    stork: [['baud=57600', 'baud=2400']],
    says: [
      'RIG_RATE_TOO_HIGH stork.yaml:4:10: rate_hz: 6 bytes 50 times a second are 3000 bits a second, and the port carries 2400; lower rate_hz to 40 or less, or raise the baud on the board and here',
    ],
  },
  {
    title: 'a frame that fits no rate',
    stork: [
      ['baud=57600', 'baud=50'],
      ['rate_hz: 50', 'rate_hz: 1'],
    ],
    says: [
      'RIG_RATE_TOO_HIGH stork.yaml:4:10: rate_hz: 6 bytes 1 times a second are 60 bits a second, and the port carries 50; raise the baud on the board and here',
    ],
  },
  // One sends two messages of 3 bytes; the other 3 bytes to pin 15 and 6 to pin 17, past the 16 of an analog message
  // (firmata/protocol, protocol.md: extended analog): 15 * 10 * 50 = 7500, and 4800 / 150 = 32 Hz fits.
  {
    title: 'frames that do not fit one baud together',
    rig: [['  - stork.yaml', '  - stork.yaml\n  - twin.yaml']],
    stork: [['baud=57600', 'baud=4800']],
    twin: true,
    says: [
      'RIG_RATE_TOO_HIGH rig.yaml:18:5: followers[1]: the commands of stork and twin together are 7500 bits a second, and their port carries 4800; for each of them, lower rate_hz to 32 or less, or raise the baud on the board and here',
    ],
  },
  // Three inputs of 3 bytes each: 90 bits; 90 / 2400 s = 37.5 ms.
  {
    title: 'readings that do not fit the baud',
    rig: [
      ['wire: lines', 'wire: firmata'],
      ['baud=115200', 'baud=2400'],
    ],
    says: [
      'RIG_SAMPLING_TOO_FAST rig.yaml:3:3: leader: 90 bits every 10 ms do not fit 2400 baud; give sampling_ms 38 or more, or raise the baud',
    ],
  },
  {
    title: 'readings that are too old before the next',
    rig: [
      ['wire: lines', 'wire: firmata'],
      ['timeout_ms: 250', 'timeout_ms: 250\n  sampling_ms: 250'],
    ],
    says: [
      'RIG_TIMEOUT_SHORT rig.yaml:8:16: leader.sampling_ms: a reading every 250 ms is always older than timeout_ms, 250, before the next; give sampling_ms well under timeout_ms, such as 10',
    ],
  },
];
