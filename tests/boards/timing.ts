/** The worst of what lies between a hand and a servo, for followers at 50 Hz and a leader at 100 Hz on Unos; microseconds. */

/** arduino-libraries/Servo, Servo.h: REFRESH_INTERVAL. */
export const FRAME_US = 20_000;
/** 1 / 50 Hz; a reading that comes up to a tenth of it early goes out at once, and the next command may be as much later. */
export const COMMAND_US = 22_000;
/** A command of up to four servos, three bytes each at 173.6 us, and the firmware's own loop. */
export const LINE_US = 3_000;
/** The widest pulse of these tests: a servo knows it when it has ended. */
const PULSE_US = 2_440;
/** From a command to the end of the first pulse that says it. */
export const KNOWN_US = LINE_US + FRAME_US + PULSE_US;
/** The command of a pulse that is the last one at some instant is at most so old. */
export const AGE_US = COMMAND_US + KNOWN_US;
/** The board samples every 10 ms by a clock that ticks each 1.024 ms, and speaks two inputs in six bytes. */
export const READING_US = 10_000 + 2_100;

/** A pulse is off by less, late interrupts included. */
export const NEAR_US = 10;
/** A servo with 1880 us over 180 degrees, as in most of these rigs. */
export const US_PER_DEG = 1880 / 180;
