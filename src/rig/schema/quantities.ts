import { z } from 'zod';

/** Names stand in commands, in line templates and as columns of CSV: one shape serves all. */
const NAME_SHAPE = /^[a-z][a-z0-9_-]*$/;
const NAME_LETTERS_MAX = 32;

/** Ten turns: more than any joint or winch makes; bounds keep every sum of degrees finite. */
const ANGLE_DEG_MAX = 3600;
const SPEED_DEG_S_MAX = 10_000;
const ACCEL_DEG_S2_MAX = 1_000_000;
const COUNTS_MAX = 1e9;
const PULSE_US_MAX = 20_000;
const CHANNEL_MAX = 65_535;
const LENGTH_MM_MAX = 100_000;
const MASS_G_MAX = 1e7;
const FACTOR_MAX = 100;
const POINTS_MAX = 256;

export const nameOf = (what: string) => z.string().regex(NAME_SHAPE).max(NAME_LETTERS_MAX).describe(what);
export const textOf = (what: string) => z.string().min(1).max(256).describe(what);

export const degrees = () => z.number().min(-ANGLE_DEG_MAX).max(ANGLE_DEG_MAX);
export const degreesAmount = () => z.number().min(0).max(ANGLE_DEG_MAX);
export const degreesPerSecond = () => z.number().gt(0).max(SPEED_DEG_S_MAX);
export const degreesPerSecondSquared = () => z.number().gt(0).max(ACCEL_DEG_S2_MAX);
export const counts = () => z.number().min(-COUNTS_MAX).max(COUNTS_MAX);
const microseconds = () => z.number().min(-PULSE_US_MAX).max(PULSE_US_MAX);
export const channel = () => z.int().min(0).max(CHANNEL_MAX);
export const factor = () => z.number().gt(0).max(FACTOR_MAX);
const weight = () => z.number().min(-FACTOR_MAX).max(FACTOR_MAX);
export const millimetres = () => z.number().min(-LENGTH_MM_MAX).max(LENGTH_MM_MAX);
export const grams = () => z.number().gt(0).max(MASS_G_MAX);
export const positive = (max: number) => z.number().gt(0).max(max);

export const at = (what: string) => z.tuple([millimetres(), millimetres(), millimetres()]).describe(what);

/** Degrees and microseconds of a servo, from the lowest angle up or down. */
export const servoPoints = () =>
  z
    .array(z.tuple([degrees(), microseconds()]))
    .min(2)
    .max(POINTS_MAX)
    .describe(
      'two or more measured pairs [degrees, microseconds], rising or falling, such as [[-90, 560], [90, 2440]]',
    );

/** Counts and degrees of a leader joint. */
export const leaderPoints = () =>
  z
    .array(z.tuple([counts(), degrees()]))
    .min(2)
    .max(POINTS_MAX)
    .describe('two or more measured pairs [counts, degrees], rising or falling, such as [[112, -120], [911, 120]]');

/** Joint names with their weights. */
export const weights = (what: string) => z.record(nameOf('a joint name'), weight()).describe(what);
