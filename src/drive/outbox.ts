/** What a command does. `move` carries a frame; the others switch. */
export type CommandKind = 'move' | 'limp' | 'power_on' | 'power_off';

/** Switching commands that wait for the port, each at most once: bounded by construction. */
export interface Outbox {
  readonly some: boolean;
  ask(kind: Exclude<CommandKind, 'move'>): void;
  /** The most urgent one: power off, then the end of pulses, then power on. */
  take(): CommandKind;
}

const URGENCY = ['power_off', 'limp', 'power_on'] as const;

export function outbox(): Outbox {
  const waiting = new Set<CommandKind>();
  const self = {
    some: false,
    ask(kind: Exclude<CommandKind, 'move'>): void {
      // Switching off takes back a switching on that has not gone out, and the other way round.
      if (kind === 'power_off') waiting.delete('power_on');
      if (kind === 'power_on') waiting.delete('power_off');
      waiting.add(kind);
      self.some = true;
    },
    take(): CommandKind {
      const kind = URGENCY.find((k) => waiting.has(k)) ?? 'limp';
      waiting.delete(kind);
      self.some = waiting.size > 0;
      return kind;
    },
  };
  return self;
}
