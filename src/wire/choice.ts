import type { LinesOptions } from './lines-options.ts';

/** Which wire a port speaks, with that wire's options. */
export type WireChoice =
  | { readonly name: 'lines'; readonly lines: LinesOptions }
  | { readonly name: 'frames' }
  | { readonly name: 'firmata' };
