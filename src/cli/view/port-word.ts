import type { BoardStatus } from '../../bridge/live.ts';
import { span, type Span } from './layout.ts';

/** @param port null where the follower's port is not opened, in a dry run */
export function portSpan(port: BoardStatus | null): Span {
  if (port === null) return span('port not used', 'dim');
  if (port.ready) return span('port open', 'dim');
  if (port.open) return span('board not heard', 'waiting');
  return port.fault === null ? span('port opening', 'waiting') : span('port closed', 'bad');
}
