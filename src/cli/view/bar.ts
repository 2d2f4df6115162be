import type { Line, Span } from './layout.ts';
import type { Shapes } from './shapes.ts';

interface Within {
  readonly angle_deg: number;
  readonly target_deg: number;
  readonly range_deg: readonly [number, number];
}

/** A joint's range as a bar of `width` columns, ends included, with where the arm is told to be and where it is to go. */
export function bar({ angle_deg, target_deg, range_deg }: Within, width: number, shapes: Shapes): Line {
  const inner = width - 2;
  const [low, high] = range_deg;
  const place = (deg: number): number => {
    const share = high > low ? (deg - low) / (high - low) : 0.5;
    return Math.round(Math.min(Math.max(share, 0), 1) * (inner - 1));
  };
  const angle = place(angle_deg);
  const target = place(target_deg);
  const track = (columns: number): Span => ({ text: shapes.bar.repeat(Math.max(0, columns)), tone: 'dim' });
  const first = Math.min(angle, target);
  const second = Math.max(angle, target);
  const mark = (at: number): Span => {
    if (angle === target) return { text: shapes.both, tone: 'strong' };
    return at === angle ? { text: shapes.angle, tone: 'strong' } : { text: shapes.target, tone: 'moving' };
  };
  const marks = first === second ? [mark(first)] : [mark(first), track(second - first - 1), mark(second)];
  return [
    { text: shapes.barLeft, tone: 'dim' },
    track(first),
    ...marks,
    track(inner - 1 - second),
    { text: shapes.barRight, tone: 'dim' },
  ];
}
