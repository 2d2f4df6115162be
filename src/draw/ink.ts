/**
 * Colours that colour-blind readers tell apart (M. Okabe, K. Ito, "Color Universal Design", 2008). None carries a meaning
 * alone: lines differ in their dashes as well, and words stand beside them.
 */
export const INK = {
  black: '#000000',
  orange: '#E69F00',
  sky: '#56B4E9',
  green: '#009E73',
  blue: '#0072B2',
  vermilion: '#D55E00',
} as const;

/** Lines and grids that only help the eye. */
export const FAINT = '#BBBBBB';

/** Letters on paper, millimetres. */
export const LETTER_MM = { title: 6, heading: 4.2, text: 2.9, small: 2.4 } as const;
export const FONT = 'Helvetica, Arial, "Liberation Sans", sans-serif';
