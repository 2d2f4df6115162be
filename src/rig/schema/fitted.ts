import { z } from 'zod';
import { degreesAmount } from './quantities.ts';

/** What `eidograph fit` notes beside the values it has written; nothing is driven by it. */
export const fitted = z
  .strictObject({
    date: z
      .string()
      .regex(/^\d{4}-\d{2}-\d{2}$/)
      .describe('the day of the fit, such as "2026-12-01"'),
    method: z.enum(['straight', 'monotone', 'match']).describe('how it was fitted: straight, monotone or match'),
    residual_deg: degreesAmount().describe('what the points scatter by, root mean square, in degrees'),
    error_deg: degreesAmount()
      .describe('what the map may be off by, anywhere in the measured travel, 95 times in 100, in degrees')
      .optional(),
    points: z.int().min(2).max(100_000).describe('how many points it was fitted to'),
  })
  .describe('how these values were measured, as eidograph fit notes it');
