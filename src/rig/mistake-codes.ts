/**
 * Every mistake a rig or profile file can hold. The codes are stable; README's table and a test list them all.
 * `means` says what was found, `remedy` what mends it; a mistake itself says both again with the values at hand.
 */
export const MISTAKE_CODES = {
  RIG_FILE_MISSING: {
    means: 'a file that is named is not there',
    remedy: 'mend the path; a path in a file is relative to that file',
  },
  RIG_FILE_UNREADABLE: {
    means: 'a file is there but cannot be read as UTF-8 text, or is over 1 MiB',
    remedy: 'name a text file, and allow it to be read',
  },
  RIG_YAML_SYNTAX: { means: 'the text is not YAML 1.2', remedy: 'mend the line that is named' },
  RIG_YAML_KEY_TWICE: { means: 'one map has a key twice', remedy: 'keep one of the two' },
  RIG_YAML_ALIAS: {
    means: 'an alias (*name) or a merge key (<<)',
    remedy: 'write the value out, or build on another profile with like:',
  },
  RIG_YAML_DOCUMENTS: { means: 'a file holds several documents', remedy: 'one file, one rig or profile' },
  RIG_KIND: {
    means: 'a file is another kind than its place asks for, or none: it names neither rig, leader nor follower',
    remedy: 'begin the file with rig:, leader: or follower:, and name the right file',
  },
  RIG_INCLUDE_CYCLE: {
    means: 'a file leads back to itself, or like: goes 16 files deep',
    remedy: 'write the values into one file of the circle',
  },
  RIG_KEY_UNKNOWN: { means: 'a key that means nothing here', remedy: 'take the key that is offered, or remove it' },
  RIG_KEY_MISSING: { means: 'a key that must be there is not', remedy: 'add the key; the line says what its value is' },
  RIG_VALUE_TYPE: { means: 'a value of the wrong type', remedy: 'give the type that is named' },
  RIG_VALUE_BOUNDS: { means: 'a number outside its bounds', remedy: 'stay inside the bounds that are named' },
  RIG_VALUE_CHOICE: { means: 'a word that is none of the choices', remedy: 'take one of the choices' },
  RIG_LIST_LENGTH: { means: 'a list or text that is too short or too long', remedy: 'give as many as is said' },
  RIG_NAME_SHAPE: {
    means: 'a name with other signs than a-z, 0-9, _ and -, or not beginning with a letter',
    remedy: 'use a lower-case name such as wren or left_wing',
  },
  RIG_NAME_TWICE: { means: 'two things of one list have one name', remedy: 'name each differently' },
  RIG_NAME_RESERVED: { means: 'a name that commands use for something else', remedy: 'choose another name' },
  RIG_SPAN_ORDER: { means: 'a span whose lower end is not below its upper end', remedy: 'write [lower, upper]' },
  RIG_POINTS_ORDER: {
    means: 'points that repeat a value or turn back',
    remedy: 'measure again: a map rises or falls, not both',
  },
  RIG_COUNTS_OUTSIDE: {
    means: 'counts that the converter cannot read',
    remedy: 'widen counts (12 bits: [0, 4095]), or mend the number',
  },
  RIG_BUTTON_NEVER: {
    means: 'a button that could never be pressed',
    remedy: 'put its threshold between released and pressed',
  },
  RIG_DESPIKE_EVEN: { means: 'a median over an even number of readings', remedy: 'use 1 (off), 3, 5 or 7' },
  RIG_SOURCE_UNKNOWN: { means: 'a follower joint copies a joint that the leader lacks', remedy: 'name a leader joint' },
  RIG_JOINT_UNKNOWN: { means: 'a joint is named that the profile lacks', remedy: 'name one of its joints' },
  RIG_STRETCH_SOURCES: {
    means: 'stretch with no source, several sources, or a weighted one',
    remedy: 'give from: one leader joint, or use gain and offset_deg',
  },
  RIG_SERVO_MISSING: { means: 'a joint that no servo turns', remedy: 'give it servo:, or an entry in servos:' },
  RIG_SERVO_BOTH: { means: 'a joint turned by servo: and by servos:', remedy: 'keep one of the two' },
  RIG_RANGE_BEYOND_SERVO: {
    means: 'a range that the servo points do not cover',
    remedy: 'narrow range_deg, or measure points further out',
  },
  RIG_REST_OUTSIDE: { means: 'a rest angle outside the range', remedy: 'move rest_deg inside range_deg' },
  RIG_POSE_OUTSIDE: { means: 'a pose with an angle outside the range', remedy: 'move the angle inside range_deg' },
  RIG_CHANNEL_TWICE: {
    means: 'two things on one channel of a board',
    remedy: 'give each joint, button, servo and power switch its own channel',
  },
  RIG_CHANNEL_RANGE: {
    means: 'a channel that the wire cannot address',
    remedy: 'use a channel in the span that is named',
  },
  RIG_SERVOS_MANY: {
    means: 'more servos than the wire can drive',
    remedy: 'spread them over several followers and boards',
  },
  RIG_PULSE_BOUNDS: {
    means: 'a pulse that the wire cannot carry safely (on firmata below 544 us: the board would take it for degrees)',
    remedy: 'measure the point again within the pulses that are named',
  },
  RIG_SERVO_LIMITS: {
    means: 'on firmata, outer points that the AVR servo library cannot hold as limits',
    remedy: 'lowest point at most 1059 us, highest at least 1889 us; or use another wire',
  },
  RIG_POWER_MISSING: {
    means: 'a stop category that removes power, without a power switch',
    remedy: 'give power:, or use stop_category 2',
  },
  RIG_POWER_UNABLE: {
    means: 'a power switch that the wire, as configured, cannot work',
    remedy: 'on lines give power_on and power_off',
  },
  RIG_ADDRESS: { means: 'a port address that cannot be read', remedy: 'write it as is said' },
  RIG_ADDRESS_END: {
    means: 'a simulated hand as a follower, or a simulated arm as a leader',
    remedy: 'sim:hand leads, sim:arm follows',
  },
  RIG_PORT_DIFFERS: {
    means: 'two profiles on one port that disagree about its wire, baud or board name',
    remedy: 'one port is one board: say the same in both, or use another port',
  },
  RIG_TEMPLATE_MISSING: {
    means: 'a follower on lines without a template',
    remedy: 'give wire: { lines: { template: "{shoulder.us},{elbow.us}\\n" } }',
  },
  RIG_TEMPLATE: {
    means: 'a line template that cannot be filled, or whose last number has no end',
    remedy: 'mend it as is said',
  },
  RIG_SEPARATOR: {
    means: 'a separator that a number, a name or a checksum may contain',
    remedy: 'use one sign such as ; or , or a space',
  },
  RIG_RATE_TOO_HIGH: {
    means: 'commands that do not fit the baud rate (10 bits a byte)',
    remedy: 'lower rate_hz to the rate that is named, or raise the baud on the board and here',
  },
  RIG_SAMPLING_TOO_FAST: {
    means: 'readings asked for faster than the baud rate carries them (10 bits a byte)',
    remedy: 'raise sampling_ms to the time that is named, or raise the baud on the board and here',
  },
  RIG_TIMEOUT_SHORT: {
    means: 'readings asked for so seldom that each is too old before the next',
    remedy: 'give sampling_ms well under timeout_ms',
  },
  RIG_ARM: {
    means: 'an arm that cannot be: no reach, an axis without direction, a spring whose ends meet or that has no lever',
    remedy: 'measure it again, in the links’ frames at the zero pose',
  },
  RIG_ARM_MISSING: {
    means: 'a key that needs the geometry of the arm, without arm:',
    remedy: 'give arm: with its links, or remove the key',
  },
  RIG_LINK_ORDER: {
    means: 'links in another order than their joints',
    remedy: 'list joints and links from the base to the tip',
  },
  RIG_MOTOR_MISSING: {
    means: 'a limited load where no link has a motor',
    remedy: 'give motor: { stall_nm: … } to the links, or use load: warn',
  },
  RIG_TIPPING: {
    means: 'a base of which tipping is asked and cannot be told: a part is missing, or the footprint is no outline',
    remedy: 'give base: mass_g and footprint_mm, its corners in order round, with friction',
  },
  RIG_POSE_KEPT_OUT: {
    means: 'a rest or named pose with a link inside a keep-out',
    remedy: 'move the pose or the keep-out',
  },
  RIG_REST_OVERLOAD: {
    means: 'a rest pose that is over its load, with load: limit',
    remedy: 'rest lower, balance the arm (eidograph balance), or give it a stronger motor',
  },
  RIG_TIP_STILL: {
    means: 'follow: tip of an arm whose tip no joint moves',
    remedy: 'give links to the joints that reach, or use follow: joints',
  },
  RIG_TIP_LEADER: {
    means: 'follow: tip of a leader whose geometry is not known',
    remedy: 'give arm: in the leader file, or use follow: joints',
  },
} as const satisfies Record<string, { readonly means: string; readonly remedy: string }>;

export type MistakeCode = keyof typeof MISTAKE_CODES;
