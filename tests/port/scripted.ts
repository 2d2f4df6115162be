import { type VirtualClock, virtualClock } from '../../src/clock/virtual.ts';
import { type ConnectionHandlers, type ReopeningOptions, reopening } from '../../src/port/reopening.ts';
import type { Port } from '../../src/port/types.ts';

/** One connection that says only what a test has it say. */
export interface Scripted extends ConnectionHandlers {
  readonly startedAtUs: number;
  /** What was handed over, as it is now. */
  readonly writes: Uint8Array[];
  /** null until the port lets go of it; then whether it did so gently. */
  endedGently: boolean | null;
  /** The system has let go. */
  letGo(): void;
}

export interface ScriptedPort {
  readonly clock: VirtualClock;
  readonly port: Port;
  /** Every connection so far, oldest first. */
  readonly connections: Scripted[];
  /** What the port told, with the instant in milliseconds. */
  readonly told: string[];
  /** Called after the port has told something, from inside its telling. */
  onTold: () => void;
  last(): Scripted;
  runMs(ms: number): void;
}

/** @param lineUs what each write claims to need on the line. @param holdsOn ended connections wait for `letGo`. */
export function scriptedPort(options: ReopeningOptions = {}, lineUs = 0, holdsOn = false): ScriptedPort {
  const clock = virtualClock();
  const connections: Scripted[] = [];
  const told: string[] = [];
  const tell = (what: string): void => {
    told.push(`${clock.nowUs() / 1_000} ${what}`);
    scripted.onTold();
  };
  const port = reopening(
    clock,
    'tcp:wren.local:7000',
    (handlers) => {
      let ended = (): void => {};
      const connection: Scripted = {
        ...handlers,
        startedAtUs: clock.nowUs(),
        writes: [],
        endedGently: null,
        letGo: () => ended(),
      };
      connections.push(connection);
      return {
        write(bytes) {
          connection.writes.push(bytes);
          return lineUs;
        },
        end(gently, done) {
          if (connection.endedGently !== null) throw new Error('a connection was ended twice');
          connection.endedGently = gently;
          ended = done;
          if (!holdsOn) done();
        },
      };
    },
    options,
  );
  port.start({
    opened: () => tell('opened'),
    data: (bytes) => tell(`data ${Buffer.from(bytes).toString()}`),
    idle: () => tell('idle'),
    closed: (fault, retryMs) => tell(`closed ${fault.code} (${fault.detail}), again in ${retryMs}`),
  });
  const scripted: ScriptedPort = {
    clock,
    port,
    connections,
    told,
    onTold() {},
    last() {
      const connection = connections.at(-1);
      if (connection === undefined) throw new Error('nothing was connected yet');
      return connection;
    },
    runMs: (ms) => clock.runTo(clock.nowUs() + ms * 1_000),
  };
  return scripted;
}
