import { z } from 'zod';
import { at, degrees, grams, millimetres, nameOf, positive } from './quantities.ts';

/** What the arm's kernels are built and tested for. */
const LINKS_MAX = 8;

const component = () => z.number().min(-1e3).max(1e3);

const spring = z
  .strictObject({
    n_per_mm: positive(1e5).describe('the stiffness of the spring, in newtons per millimetre, above 0'),
    free_mm: z
      .number()
      .min(0)
      .max(1e5)
      .describe('the length at which the spring pulls nothing, in millimetres; 0 where a cord makes it so'),
    from_mm: at('where the spring is held on the link before this one, [x, y, z] in millimetres'),
    to_mm: at('where the spring is held on this link, [x, y, z] in millimetres'),
  })
  .describe('a spring across the joint');

const motor = z
  .strictObject({
    stall_nm: positive(1e5).describe('the torque at standstill, in newton metres, above 0'),
    use: positive(1).default(0.5).describe('the share of the stall torque that motion may use, above 0, at most 1'),
    hold_use: positive(1)
      .default(0.3)
      .describe('the share of the stall torque that holding may use, above 0, at most 1'),
    stall_a: positive(1e4).describe('the current at standstill, in amperes, above 0').optional(),
  })
  .describe('the motor of the joint');

const link = z.strictObject({
  joint: nameOf('the joint that turns this link'),
  axis: z
    .union([z.enum(['x', 'y', 'z']), z.tuple([component(), component(), component()])])
    .describe(
      'the axis it turns about, right-handed: x (forward), y (left), z (up), or its direction [x, y, z], at the zero pose',
    ),
  to_mm: at(
    'from this joint’s axis to the next one’s (of the last link: to the tip), [x, y, z] in millimetres at the zero pose',
  ),
  mass_g: grams().describe('the mass of the link, in grams, above 0').optional(),
  centre_mm: at(
    'the centre of mass, from this joint’s axis, [x, y, z] in millimetres; absent: halfway along to_mm',
  ).optional(),
  counterweight: z
    .strictObject({
      mass_g: grams().describe('the mass of the counterweight, in grams, above 0'),
      at_mm: at('where it sits, from this joint’s axis, [x, y, z] in millimetres'),
    })
    .describe('a counterweight on this link')
    .optional(),
  spring: spring.optional(),
  motor: motor.optional(),
  drag_nm: z.number().min(0).max(1e5).default(0).describe('the friction of the joint, in newton metres'),
  cable: z
    .strictObject({
      nm_per_deg: z.number().min(0).max(1e5).describe('the stiffness of the cable loom, in newton metres per degree'),
      free_deg: degrees().default(0).describe('the angle at which the loom pulls neither way, in degrees'),
    })
    .describe('a cable loom that the joint bends')
    .optional(),
});

const base = z
  .strictObject({
    height_mm: z
      .number()
      .min(0)
      .max(1e5)
      .default(0)
      .describe('the height of the first axis above the floor, in millimetres'),
    tilt_deg: z
      .tuple([degrees(), degrees()])
      .default([0, 0])
      .describe('how the base is turned about x, then y, [degrees, degrees]; [180, 0] hangs it from a ceiling'),
    mass_g: grams().describe('the mass of the base, in grams, above 0').optional(),
    footprint_mm: z
      .array(z.tuple([millimetres(), millimetres()]))
      .min(3)
      .max(64)
      .describe('the outline that stands on the floor, three or more corners [x, y] in millimetres')
      .optional(),
    friction: z.number().min(0).max(10).describe('the friction between base and floor, 0 or more').optional(),
  })
  .prefault({})
  .describe('what the arm stands on or hangs from');

/** The geometry of an arm; frames are parallel to the base at the zero pose. */
export const arm = z
  .strictObject({
    base,
    links: z.array(link).min(1).max(LINKS_MAX).describe('the links, one a joint, base first'),
    payload: z
      .strictObject({
        mass_g: grams().describe('the mass of what the tip carries, in grams, above 0'),
        at_mm: at('where it sits, from the tip, in the last link’s frame, [x, y, z] in millimetres'),
      })
      .describe('what the tip carries')
      .optional(),
  })
  .describe('the geometry of the arm: links, masses and what holds them');

const clearance = z
  .number()
  .min(0)
  .max(1000)
  .default(0)
  .describe('how much further off every link has to stay, for its thickness, in millimetres');

export const keepOut = z
  .array(
    z.union([
      z.strictObject({
        below_mm: millimetres().describe('the height that no link may go below, in millimetres'),
        clearance_mm: clearance,
      }),
      z.strictObject({
        box_mm: z
          .tuple([at('the lower corner'), at('the upper corner')])
          .describe('a box that no link may enter, [[x, y, z], [x, y, z]] in millimetres, lower corner first'),
        clearance_mm: clearance,
      }),
    ]),
  )
  .max(64)
  .describe(
    'places no link may enter: { below_mm: 0 } or { box_mm: [[x, y, z], [x, y, z]] }, either with clearance_mm: 30, in the base’s level frame',
  );

export const supply = z
  .strictObject({
    volts: positive(1e3).describe('the voltage of the supply, in volts, above 0'),
    amps: positive(1e4).describe('the current it can give, in amperes, above 0'),
  })
  .describe('the power supply of the servos');

export type Arm = z.infer<typeof arm>;
