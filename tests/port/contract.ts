import { afterEach, describe, expect, it } from 'vitest';
import { WRITE_BYTES_MAX } from '../../src/port/reopening.ts';
import type { Port, PortFault, PortFaultCode } from '../../src/port/types.ts';

/** A port under test with whatever it is connected to, and the time they live in. */
export interface Bench {
  readonly port: Port;
  /** Everything the far end has received so far. */
  received(): Buffer;
  /** The far end sends; called only after it has received something, so that it knows its peer. */
  send(bytes: Uint8Array): void;
  /** The far end goes away. */
  vanish(): Promise<void>;
  /** It is there again, under the same address. */
  comeBack(): Promise<void>;
  /** Lets time pass until `condition` holds; fails when it does not within a generous bound. */
  until(what: string, condition: () => boolean): Promise<void>;
  /** Lets everything happen that is under way. */
  settle(): Promise<void>;
  /** Takes the far end apart; the port is closed by then. */
  dispose(): Promise<void>;
  /** What the process still holds open for this kind of port: handles, sockets, wake-ups. */
  held(): number;
}

export interface Kind {
  readonly name: string;
  readonly make: () => Promise<Bench>;
  /** How the loss of the far end is reported. */
  readonly lossCode: PortFaultCode;
  /** How its absence is reported when the port is opened anew; null: this kind opens whether or not anybody is there. */
  readonly absenceCode: PortFaultCode | null;
  /** Its loss shows only when something is sent to it. */
  readonly noticesByWriting: boolean;
  /** Why it cannot be tested here; null when it can. */
  readonly missing: string | null;
}

interface Heard {
  readonly events: string[];
  readonly faults: PortFault[];
  readonly pausesMs: number[];
  bytes: Buffer;
  onIdle: () => void;
}

const ALL_BYTES = Uint8Array.from({ length: 256 }, (_, value) => value);

/** What every kind of port must do, whatever is behind it. */
export function portContract(kind: Kind): void {
  describe.skipIf(kind.missing !== null)(
    `a ${kind.name} port${kind.missing === null ? '' : ` (${kind.missing})`}`,
    () => {
      const benches: Bench[] = [];
      afterEach(async () => {
        for (const bench of benches.splice(0)) {
          await closed(bench);
          await bench.dispose();
        }
      });

      /** Closing may need time to pass, which on a virtual clock only `until` makes it do. */
      const closed = async (bench: Bench): Promise<void> => {
        let isClosed = false;
        const closing = bench.port.close().then(() => {
          isClosed = true;
        });
        await bench.until('closed', () => isClosed);
        await closing;
      };

      const started = async (): Promise<{ bench: Bench; port: Port; heard: Heard }> => {
        const bench = await kind.make();
        benches.push(bench);
        const heard: Heard = { events: [], faults: [], pausesMs: [], bytes: Buffer.alloc(0), onIdle() {} };
        bench.port.start({
          opened: () => heard.events.push('opened'),
          data: (bytes) => {
            heard.bytes = Buffer.concat([heard.bytes, bytes]);
          },
          idle: () => {
            heard.events.push('idle');
            heard.onIdle();
          },
          closed: (fault, retryMs) => {
            heard.events.push('closed');
            heard.faults.push(fault);
            heard.pausesMs.push(retryMs);
          },
        });
        return { bench, port: bench.port, heard };
      };
      const opened = async (): Promise<{ bench: Bench; port: Port; heard: Heard }> => {
        const all = await started();
        expect(all.heard.events, 'nothing is told from inside start').toEqual([]);
        await all.bench.until('opened', () => all.heard.events.includes('opened'));
        return all;
      };
      const greeted = async (): Promise<{ bench: Bench; port: Port; heard: Heard }> => {
        const all = await opened();
        all.port.write(Buffer.from('hello'));
        await all.bench.until(
          'greeting',
          () => all.heard.events.at(-1) === 'idle' && all.bench.received().length === 5,
        );
        all.heard.events.length = 0;
        return all;
      };
      const loseAndReopen = async ({ bench, port, heard }: Awaited<ReturnType<typeof opened>>): Promise<void> => {
        const before = heard.events.length;
        await bench.vanish();
        await bench.until('the loss', () => {
          if (kind.noticesByWriting && port.canTake) port.write(Buffer.from('?'));
          return heard.events.includes('closed', before);
        });
        await bench.comeBack();
        await bench.until('reopened', () => heard.events.at(-1) === 'opened');
      };

      it('opens by itself, once, and can then take a write', async () => {
        const { bench, port, heard } = await opened();
        await bench.settle();
        expect(heard.events).toEqual(['opened']);
        expect(port.canTake).toBe(true);
      });

      it('takes nothing before it is open', async () => {
        const { port } = await started();
        expect(port.canTake).toBe(false);
        expect(port.write(ALL_BYTES)).toBe(false);
      });

      it('carries every byte value to the far end, from a buffer that is overwritten at once', async () => {
        const { bench, port } = await opened();
        const bytes = Uint8Array.from(ALL_BYTES);
        expect(port.write(bytes)).toBe(true);
        bytes.fill(0x55);
        await bench.until('256 bytes', () => bench.received().length >= 256);
        expect([...bench.received()]).toEqual([...ALL_BYTES]);
      });

      it('carries every byte value from the far end', async () => {
        const { bench, heard } = await greeted();
        bench.send(ALL_BYTES);
        await bench.until('256 bytes', () => heard.bytes.length >= 256);
        expect([...heard.bytes]).toEqual([...ALL_BYTES]);
      });

      it('has one write in flight, and says when it has left', async () => {
        const { bench, port, heard } = await opened();
        let couldTakeWhenIdle = false;
        heard.onIdle = () => {
          couldTakeWhenIdle = port.canTake;
        };
        expect(port.write(Buffer.from('one'))).toBe(true);
        expect(heard.events, 'nothing is told from inside write').toEqual(['opened']);
        expect(port.canTake).toBe(false);
        expect(port.write(Buffer.from('two'))).toBe(false);
        await bench.until('idle and arrived', () => heard.events.includes('idle') && bench.received().length >= 3);
        await bench.settle();
        expect(heard.events).toEqual(['opened', 'idle']);
        expect(couldTakeWhenIdle).toBe(true);
        expect(bench.received().toString()).toBe('one');
      });

      it('keeps the order of writes that follow each other on idle', async () => {
        const { bench, port, heard } = await opened();
        const written = Array.from({ length: 25 }, (_, i) => `<${i}>`);
        let taken = 0;
        heard.onIdle = () => {
          const text = written[taken];
          if (text !== undefined && port.write(Buffer.from(text))) taken++;
        };
        heard.onIdle();
        await bench.until('all writes', () => bench.received().length >= written.join('').length);
        expect(bench.received().toString()).toBe(written.join(''));
      });

      it('tells the loss of the far end with its address, and opens again after the shortest pause', async () => {
        const all = await greeted();
        await loseAndReopen(all);
        expect(all.heard.faults[0]).toMatchObject({ code: kind.lossCode, address: all.port.address });
        expect(all.heard.faults[0]?.detail).not.toBe('');
        expect(all.heard.pausesMs[0]).toBe(100);
        const before = all.bench.received().length;
        await all.bench.until('a write after reopening', () => {
          all.port.write(Buffer.from('back'));
          return all.bench.received().length > before;
        });
        all.bench.send(Buffer.from('welcome'));
        await all.bench.until('data after reopening', () => all.heard.bytes.toString() === 'welcome');
      });

      it('tells opened and closed in turn, and takes nothing in between', async () => {
        const all = await greeted();
        const { heard, port } = all;
        await loseAndReopen(all);
        await loseAndReopen(all);
        const turns = heard.events.filter((event) => event !== 'idle');
        expect(turns.join(' ')).toMatch(/^((closed )+opened ?){2}$/);
        expect(port.canTake).toBe(true);
      });

      it('says why it cannot open while nobody is there, with growing pauses', async (context) => {
        if (kind.absenceCode === null) return context.skip(`a ${kind.name} port opens whether or not anybody is there`);
        const { bench, heard, port } = await opened();
        await bench.vanish();
        await bench.until('three faults', () => heard.faults.length >= 3);
        expect(port.canTake).toBe(false);
        expect(heard.faults.map((fault) => fault.code)).toEqual([kind.lossCode, kind.absenceCode, kind.absenceCode]);
        expect(heard.pausesMs).toEqual([100, 200, 400]);
      });

      it('closes in the middle of a pause and stays closed', async (context) => {
        if (kind.absenceCode === null) return context.skip(`a ${kind.name} port opens whether or not anybody is there`);
        const { bench, heard, port } = await opened();
        await bench.vanish();
        await bench.until('the loss', () => heard.faults.length >= 1);
        const told = heard.events.length;
        const closing = port.close();
        await bench.comeBack();
        await bench.settle();
        await closing;
        expect(heard.events.length).toBe(told);
      });

      it('lets the write in flight arrive before it closes', async () => {
        const { bench, port } = await opened();
        expect(port.write(Buffer.from('farewell'))).toBe(true);
        await closed(bench);
        await bench.until('the last write', () => bench.received().toString() === 'farewell');
      });

      it('tells nothing more from the moment close is called, whatever the far end does', async () => {
        const { bench, port, heard } = await greeted();
        const closing = port.close();
        expect(port.close()).toBe(closing);
        expect(port.canTake).toBe(false);
        expect(port.write(Buffer.from('late'))).toBe(false);
        bench.send(Buffer.from('are you there?'));
        await bench.settle();
        await closing;
        await bench.vanish();
        await bench.settle();
        expect(heard.events).toEqual([]);
        expect(heard.bytes.length).toBe(0);
      });

      it('holds nothing and has leaked no listener after reopening and closing', async () => {
        const warnings: string[] = [];
        const onWarning = (warning: Error): void => void warnings.push(warning.message);
        process.on('warning', onWarning);
        const bench = await kind.make();
        await bench.dispose();
        const heldBefore = bench.held();
        const all = await greeted();
        for (let i = 0; i < 3; i++) await loseAndReopen(all);
        await closed(all.bench);
        await all.bench.dispose();
        await all.bench.until('nothing held', () => all.bench.held() <= heldBefore);
        process.off('warning', onWarning);
        expect(warnings).toEqual([]);
      });

      it('refuses to be started twice, and writes that are empty or too long', async () => {
        const { port } = await opened();
        const listener = { opened() {}, data() {}, idle() {}, closed() {} };
        expect(() => port.start(listener)).toThrow(/started/);
        expect(() => port.write(new Uint8Array(0))).toThrow(RangeError);
        expect(() => port.write(new Uint8Array(WRITE_BYTES_MAX + 1))).toThrow(RangeError);
        expect(port.canTake).toBe(true);
      });
    },
  );
}
