/** Files say degrees, millimetres, grams, milliseconds and percent; the program SI units, microseconds and shares. */
export const radians = (degrees: number): number => (degrees * Math.PI) / 180;
export const degreesOf = (radians: number): number => (radians * 180) / Math.PI;
export const metres = (millimetres: number): number => millimetres / 1000;
export const millimetresOf = (metres: number): number => metres * 1000;
export const kilograms = (grams: number): number => grams / 1000;
export const gramsOf = (kilograms: number): number => kilograms * 1000;
export const microsecondsOf = (milliseconds: number): number => Math.round(milliseconds * 1_000);
export const periodUs = (hertz: number): number => Math.round(1_000_000 / hertz);
export const share = (percent: number): number => percent / 100;
