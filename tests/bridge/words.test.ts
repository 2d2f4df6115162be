import { describe, expect, it } from 'vitest';
import type { Word } from '../../src/bridge/board.ts';
import {
  BLOCK_WORDS,
  CAUTIONS,
  FAULTS,
  faultWords,
  HEALTH_WORDS,
  leftHolding,
  LIMIT_WORDS,
  sentences,
  STATE_WORDS,
  supplyWord,
} from '../../src/bridge/words.ts';
import { BLOCKS, LIMITS } from '../../src/follower/reasons.ts';
import { STATES } from '../../src/follower/states.ts';
import { ILLS } from '../../src/leader/health.ts';
import type { PortFaultCode } from '../../src/port/types.ts';
import { loadRig } from '../../src/rig/load.ts';
import type { CompiledRig } from '../../src/rig/compiled.ts';

const LEADER = `{ leader: stick, port: "serial:/dev/ttyUSB0", wire: frames, counts: [0, 4095],
  joints: [{ name: base, channel: 0, points: [[0, -90], [4095, 90]] }] }`;

/** A rig of two followers; `shared` puts the first on the leader's own board. */
function rigOn(ports: readonly [string, string]): CompiledRig {
  const follower = (name: string, port: string, channel: number): string =>
    `  - { follower: ${name}, port: "${port}", wire: frames, rate_hz: 50, wake: rest, joints: [{ name: base, from: base,
      range_deg: [-45, 45], speed_deg_s: 60, accel_deg_s2: 240,
      servo: { channel: ${channel}, points: [[-90, 600], [90, 2400]] } }] }`;
  const text = `rig: two\nleader: ${LEADER}\nfollowers:\n${follower('wren', ports[0], 3)}\n${follower('stork', ports[1], 4)}\n`;
  const loaded = loadRig('two.yaml', () => ({ text }));
  if ('mistakes' in loaded) throw new Error(JSON.stringify(loaded.mistakes));
  return loaded.rig;
}

const ACM1 = 'serial:/dev/ttyACM1';
const speak = sentences(rigOn(['serial:/dev/ttyACM0', ACM1]));

const failed = (code: PortFaultCode, address: string, detail = ''): Word => ({
  kind: 'opening_failed',
  fault: { code, address, detail },
  retryMs: 100,
});

describe('A port that is not open', () => {
  it('is told with who hangs on it, what is the matter and what to do', () => {
    expect(speak(failed('PORT_BUSY', ACM1))).toEqual({
      text: 'stork: /dev/ttyACM1 is held by another program; close it and the bridge reconnects',
      weight: 'care',
    });
  });

  it('is told with the group to join, where permission is missing', () => {
    expect(speak(failed('PORT_FORBIDDEN', ACM1)).text).toMatch(/^stork: .*dialout.*log in again$/);
  });

  it('names everybody on it, the leader first', () => {
    const both = sentences(rigOn(['serial:/dev/ttyUSB0', ACM1]));
    expect(both(failed('PORT_MISSING', 'serial:/dev/ttyUSB0')).text).toMatch(/^stick and wren: \/dev\/ttyUSB0 is not/);
  });

  it('is told with what the system says, where nothing better is known', () => {
    expect(speak(failed('PORT_FAILED', ACM1, 'ioctl: strange')).text).toContain('failed (ioctl: strange); ');
  });

  const CODES = Object.keys(FAULTS) as PortFaultCode[];
  const ADDRESSES = [ACM1, 'tcp:stage.local:7000', 'udp:stage.local:7000', 'sim:arm?seed=3'];
  it.each(CODES.flatMap((code) => ADDRESSES.map((address) => [code, address] as const)))(
    '%s on %s has a matter and a remedy, and names the place',
    (code, address) => {
      const text = faultWords(address, code);
      const [matter, remedy] = text.split('; ');
      expect(matter).toMatch(/^(\/dev\/ttyACM1|tcp stage\.local:7000|udp stage\.local:7000|sim:arm\?seed=3) \w+/);
      expect(remedy?.length).toBeGreaterThan(10);
    },
  );

  it('that is lost is told like one that never opened', () => {
    const fault = { code: 'PORT_CLOSED' as const, address: ACM1, detail: '' };
    expect(speak({ kind: 'lost_port', fault, retryMs: 100 }).text).toBe(
      'stork: /dev/ttyACM1 was unplugged; plug it in again and the bridge reconnects',
    );
  });
});

describe('A board', () => {
  const WORDS: readonly (readonly [Word, RegExp, 'note' | 'care'])[] = [
    [{ kind: 'opened', address: ACM1 }, /^stork: \/dev\/ttyACM1 is open$/, 'note'],
    [{ kind: 'waiting', address: ACM1 }, /^stork: .*restart.*waited for$/, 'note'],
    [{ kind: 'greeted', address: ACM1, board: null }, /^stork: the board answers$/, 'note'],
    [{ kind: 'greeted', address: ACM1, board: 'stork-1' }, /answers: it is stork-1$/, 'note'],
    [{ kind: 'rebooted', address: ACM1 }, /restarted.*no pulses; .*supply/, 'care'],
    [
      { kind: 'stranger', address: ACM1, board: 'wren-1', wanted: 'stork-1' },
      /is wren-1, not stork-1; plug in the right one, or mend board:/,
      'care',
    ],
    [{ kind: 'lacks', address: ACM1, what: 'output', channel: 5 }, /no output 5; mend the channel/, 'care'],
    [
      { kind: 'garbled', address: ACM1, why: 'checksum', total: 12 },
      /sum is wrong.*12 so far; check baud rate, cable/,
      'care',
    ],
  ];
  it.each(WORDS)('says %j as a sentence', (word, expected, weight) => {
    const sentence = speak(word);
    expect(sentence.text).toMatch(expected);
    expect(sentence.weight).toBe(weight);
  });

  it('that no rig knows is called by its address', () => {
    expect(speak({ kind: 'opened', address: 'tcp:x:1' }).text).toBe('tcp:x:1: tcp:x:1 is open');
  });
});

describe('What keeps a follower from following', () => {
  it('has words for each state, block, limit and ill there is', () => {
    expect(Object.keys(STATE_WORDS)).toEqual([...STATES]);
    expect(Object.keys(BLOCK_WORDS)).toEqual(Object.keys(BLOCKS));
    expect(Object.keys(LIMIT_WORDS)).toEqual(Object.keys(LIMITS));
    expect(Object.keys(HEALTH_WORDS)).toEqual([...ILLS]);
  });

  it('is told with a remedy, block by block', () => {
    for (const text of Object.values(BLOCK_WORDS)) expect(text).toMatch(/^[^;]+; [^;]+$/);
  });

  it('is told with a remedy, ill by ill', () => {
    for (const [ill, [word, remedy]] of Object.entries(HEALTH_WORDS)) {
      expect(word.length).toBeGreaterThan(3);
      expect(remedy === '').toBe(ill === 'sound');
    }
  });

  it('says how far a supply has sagged or risen', () => {
    expect(supplyWord(0.9)).toBe('all pots read 10 % low together; check their supply');
    expect(supplyWord(1.05)).toBe('all pots read 5 % high together; check their supply');
  });

  it('is not hidden where arms were left before they stood', () => {
    expect(leftHolding(['wren'], false)).toContain('before it stood still');
    expect(leftHolding(['wren'], true)).toContain('go on holding');
  });
});

describe('The cautions', () => {
  it('say what has to be known, in lines that fit a terminal', () => {
    const all = CAUTIONS.join(' ');
    for (const word of ['crush', 'fall', 'pace 25 %', 'no emergency stop', 'ISO 13850', 'IEC 60204-1', 'Local rules'])
      expect(all).toContain(word);
    for (const line of CAUTIONS) expect(line.length).toBeLessThanOrEqual(76);
  });
});
