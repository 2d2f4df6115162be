/**
 * The sentences people read: the one place where a fault, a state or a reason becomes words. Each says what is the
 * matter and, after a semicolon, what to do about it. Screens, logs and pages show them as they are.
 */
import type { BLOCKS, LIMITS } from '../follower/reasons.ts';
import type { State } from '../follower/states.ts';
import type { Ill } from '../leader/health.ts';
import { type Address, parseAddress } from '../port/address.ts';
import type { PortFaultCode } from '../port/types.ts';
import type { CompiledRig } from '../rig/compiled.ts';
import type { Garble } from '../wire/types.ts';
import type { Word } from './board.ts';

/** How much a sentence wants to be read: `note` is as it should be, `care` needs a hand. */
export type Weight = 'note' | 'care';

export interface Sentence {
  readonly text: string;
  readonly weight: Weight;
}

type Saying = readonly [matter: string, remedy: string];
/** What holds for one kind of address where it differs from the rest. */
type Sayings = { readonly any: Saying } & { readonly [K in Address['kind']]?: Saying };

const PLUG = 'check the plug and the cable; the bridge reconnects';

export const FAULTS: Readonly<Record<PortFaultCode, Sayings>> = {
  PORT_BUSY: {
    any: ['is held by another program', 'close it and the bridge reconnects'],
    udp: ['cannot have its local port: another program uses it', 'close that program, or write another ?local='],
  },
  PORT_MISSING: {
    any: ['is not there', 'plug the board in, or write the address that "eidograph ports" shows'],
    tcp: ['has a host that nobody knows', 'mend the name in the rig, or look to the network'],
    udp: ['has a host that nobody knows', 'mend the name in the rig, or look to the network'],
  },
  PORT_FORBIDDEN: {
    any: [
      'may not be opened by this user',
      'join the group it belongs to (Debian: sudo usermod -aG dialout $USER), then log in again',
    ],
    tcp: ['is forbidden by the system', 'look to its firewall'],
    udp: ['is forbidden by the system', 'look to its firewall'],
  },
  PORT_CLOSED: {
    any: ['was unplugged', 'plug it in again and the bridge reconnects'],
    tcp: ['was closed by the board', 'check that it runs; the bridge reconnects'],
    udp: ['was closed', 'check that the board runs; the bridge reconnects'],
  },
  PORT_REFUSED: {
    any: ['does not open', PLUG],
    tcp: ['has nobody who listens', 'start the board, or mend host and port in the rig'],
    udp: ['cannot be reached', 'start the board, or mend host and port in the rig'],
  },
  PORT_STALLED: {
    any: ['takes no more commands', 'check that the board runs and reads them; the bridge reconnects'],
  },
  PORT_FAILED: { any: ['failed', PLUG] },
};

const GARBLES: Readonly<Record<Garble, string>> = {
  checksum: 'its sum is wrong',
  oversize: 'it is too long',
  syntax: 'it cannot be read',
  count: 'it holds another number of values than the profile',
  cut: 'its end is missing',
};

/** Turns what boards have to tell into sentences that name who hangs on the port. */
export function sentences(rig: CompiledRig): (word: Word) => Sentence {
  const boards = new Map(
    rig.boards.map((board) => {
      const followers = board.followers.map((f) => rig.plan.followers[f]?.name ?? '');
      const names = board.leads ? [rig.plan.leader.name, ...followers] : followers;
      return [board.address.text, { address: board.address, who: names.join(' and ') }] as const;
    }),
  );
  return (word) => {
    const text = 'fault' in word ? word.fault.address : word.address;
    const board = boards.get(text);
    const who = board?.who ?? text;
    return { text: `${who}: ${told(word, board?.address ?? null)}`, weight: WEIGHTS[word.kind] };
  };
}

const WEIGHTS: Readonly<Record<Word['kind'], Weight>> = {
  opening_failed: 'care',
  lost_port: 'care',
  opened: 'note',
  waiting: 'note',
  greeted: 'note',
  rebooted: 'care',
  stranger: 'care',
  lacks: 'care',
  garbled: 'care',
};

function told(word: Word, address: Address | null): string {
  switch (word.kind) {
    case 'opening_failed':
    case 'lost_port':
      return faultOf(word.fault.address, word.fault.code, address, word.fault.detail);
    case 'opened':
      return `${address === null ? word.address : placeOf(address)} is open`;
    case 'waiting':
      return 'no word from the board yet; many boards restart when their port opens, so it is waited for';
    case 'greeted':
      return word.board === null ? 'the board answers' : `the board answers: it is ${word.board}`;
    case 'rebooted':
      return 'the board has restarted and its servos have no pulses; look to its supply and cable';
    case 'stranger':
      return `the board is ${word.board}, not ${word.wanted}; plug in the right one, or mend board: in the profile`;
    case 'lacks':
      return `the board has no ${word.what} ${word.channel}; mend the channel in the profile`;
    case 'garbled': {
      const why = GARBLES[word.why];
      return `a damaged message (${why}), ${word.total} so far; check baud rate, cable and common ground`;
    }
  }
}

/** What keeps a port closed, and what to do, for as long as it does. */
export function faultWords(port: string, code: PortFaultCode): string {
  const address = parseAddress(port);
  return faultOf(port, code, address.kind === 'mistake' ? null : address, '');
}

function faultOf(port: string, code: PortFaultCode, address: Address | null, detail: string): string {
  const sayings = FAULTS[code];
  const [matter, remedy] = (address === null ? undefined : sayings[address.kind]) ?? sayings.any;
  const said = code === 'PORT_FAILED' && detail !== '' ? ` (${detail})` : '';
  return `${address === null ? port : placeOf(address)} ${matter}${said}; ${remedy}`;
}

/** A place as the operator knows it: a device by its path, a board on the network by host and port. */
function placeOf(address: Address): string {
  switch (address.kind) {
    case 'serial':
      return address.path;
    case 'tcp':
    case 'udp':
      return `${address.kind} ${address.host}:${address.port}`;
    case 'sim':
      return address.text;
  }
}

/** What a follower does in each state, or what it waits for; empty where the word says it all. */
export const STATE_WORDS: Readonly<Record<State, string>> = {
  absent: 'its port is down or its board has not answered',
  waking: 'waits to be let go',
  joining: 'moves gently to where the leader is',
  following: '',
  holding: '',
  parking: 'moves gently to its rest pose',
  limp: 'its pulses have ended; let it go to wake it',
  jogging: 'one servo is moved to be measured',
  stopped: 'rearm it, then join',
};

/** In `waking`, by what its first pulses will say: a servo runs there at full speed from wherever it is. */
export const WAKES_AT = {
  rest: 'wakes at its rest pose; see that it stands so, then let it go',
  last: 'wakes where it was last told to be; see that it stands so, then let it go',
} as const;
/** In `waking`, once it has been let go. */
export const GOING = 'its servos get their first pulses, one after another';
/** In `following`, with the clutch out. */
export const CLUTCHED = 'its clutch is out: it stands while the leader moves';

export const BLOCK_WORDS: Readonly<Record<keyof typeof BLOCKS, string>> = {
  stale: 'no fresh reading of the leader; look to its port and cable',
  enable: 'the enable button is released; hold it down to go on',
  held: 'held; join goes on',
  contact: 'its port took nothing while it moved; look to it, then join',
  pedal: 'the hold button is pressed; release it to go on',
  fault: 'given up after a fault of this program; end the run and report it',
};

/** Of a follower as the lead goes from hand to take, or back. */
export const LEAD_CHANGES = 'the lead changes; it joins gently';

export const LIMIT_WORDS: Readonly<Record<keyof typeof LIMITS, string>> = {
  range: 'end of range',
  speed: 'full speed',
  deadband: 'in deadband',
  sick: 'pot is sick',
  end_speed: 'full end speed',
  keep_out: 'keep-out',
  load: 'full load',
  reach: 'out of reach',
};

/** For each ill but `sound`: a word, and what to do. */
export const HEALTH_WORDS: Readonly<Record<Ill, Saying>> = {
  sound: ['sound', ''],
  rail: ['at the rail', 'a wire of its pot is broken or shorted; check the plug'],
  jumping: ['jumping', 'its pot has a bad contact; check the plug, then the track'],
  beyond: ['beyond', 'it reads outside its travel; check that its pot has not slipped'],
  silent: ['silent', 'no value comes; check its channel and its wire'],
};

export const FROZEN: Saying = ['frozen', 'it has not changed while others moved; check that its pot turns'];

/** @param ratio what all channels have scaled by, together */
export function supplyWord(ratio: number): string {
  const percent = Math.abs(Math.round((ratio - 1) * 100));
  return `all pots read ${percent} % ${ratio < 1 ? 'low' : 'high'} together; check their supply`;
}

/** Short enough for a terminal of 76 columns; the first line matters most. */
export const CAUTIONS: readonly string[] = [
  'Keep out of reach: moving arms crush and pinch; springs and hung arms fall.',
  'First run of a rig: pace 25 %.',
  'This program is no emergency stop. That is a hard-wired device, fitted by',
  'someone competent (ISO 13850, IEC 60204-1).',
  'Local rules and licensed practice come first.',
];

/** Where there is no screen to ask on. */
export const INTERRUPTED = 'every follower brakes and holds; interrupt once more to leave';

/** How a run ended, by the reason that `--json` names. */
export const ENDINGS = {
  interrupted: 'interrupted; every follower has braked',
  terminated: 'ended from outside; every follower has braked',
  quit: 'left by the operator',
  parked: 'every follower is parked',
  unparked: 'ended with a follower that is not parked',
  over: 'its time is over',
  broken: 'ended by a fault of this program',
} as const;

export function notParked(followers: readonly string[]): string {
  return `not parked: ${followers.join(', ')}; look to the arm before its power goes`;
}

/** What the operator has to know who leaves arms behind that have pulses. */
export function leftHolding(followers: readonly string[], still: boolean): string {
  const names = followers.join(', ');
  return still
    ? `${names}: left where the last command put it; most boards go on holding until their power goes`
    : `${names}: left before it stood still; look to the arm`;
}
