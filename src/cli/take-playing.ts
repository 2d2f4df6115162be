import { US_PER_S } from '../clock/clock.ts';
import type { CompiledRig } from '../rig/compiled.ts';
import type { Cast } from '../take/cast.ts';
import type { Made } from '../take/header.ts';
import { type Phase, type Player, player } from '../take/player.ts';
import type { Take } from '../take/reader.ts';
import type { Row } from '../take/row.ts';
import type { Companion, Company } from './companion.ts';
import type { PlayOptions } from './take-play-options.ts';
import type { Recording } from './take-recording.ts';
import type { Score } from './take-score.ts';

/** What goes along with a run while a take plays, and is recorded anew where joints are in the hand. */
export function playing(
  take: Take,
  rig: CompiledRig,
  rows: Iterator<Row>,
  score: Score,
  paced: boolean,
  options: PlayOptions,
  recorded: Recording | null,
): Companion {
  let company: Company | null = null;
  let running: Player | null = null;
  let begun = false;
  const { layer } = options;
  // On a time of its own each follower has commands of its own, whoever led them.
  const own = paced ? ownCommands(rig) : null;
  const made: Made = {
    by: 'layer',
    parents: [{ take: take.name, rows: take.rows }],
    how: { in_hand: layer?.joints.join(' ') ?? '' },
    posed: true,
  };

  const changed = (phase: Phase): void => {
    if (company === null) return;
    const say = (text: string): void => company?.say({ text, weight: 'note' });
    switch (phase) {
      case 'easing':
        return say(`${take.name}: the arms go gently to where it begins`);
      case 'counting':
        return say(`${take.name}: begins in ${Math.ceil(options.countInUs / US_PER_S)} s`);
      case 'playing':
        // It goes on while the hand leads and the take waits.
        if (layer !== null && !begun) recorded?.start(layer.as, made);
        begun = true;
        return say(`${take.name}: plays`);
      case 'handed':
        return say('the hand leads; o gives back to the take');
      case 'over':
        recorded?.stop();
        company.sayLast({ text: `${take.name}: played; ${timing(running)}`, weight: 'note' });
        if (!options.stay) company.parkAndLeave();
    }
  };

  return {
    onStart: (drive, events$, clock) => recorded?.onStart(drive, events$, clock),
    begin(to) {
      company = to;
      recorded?.begin(to);
      running = player(to.live, to.clock, rows, {
        cast: own ?? score.cast,
        by: own === null ? score.by : 'commands',
        posed: score.posed,
        countInUs: options.countInUs,
        changed,
        passed: (mark) => recorded?.mark(mark),
      });
      changed('easing');
    },
    standing() {
      const also = recorded?.standing() ?? '';
      const plays = running === null ? '' : standingOf(take.name, running);
      return also === '' ? plays : `${plays}, ${also}`;
    },
    key(key) {
      if (key === 'hand_over') running?.handOver();
      else recorded?.key(key);
    },
    async end() {
      running?.stop();
      return (await recorded?.end()) ?? true;
    },
  };
}

function standingOf(name: string, { is }: Player): string {
  switch (is.phase) {
    case 'easing':
      return `easing in to ${name}`;
    case 'counting':
      return `${name} in ${Math.ceil(is.countUs / US_PER_S)} s`;
    case 'playing':
      return `playing ${name} ${Math.floor(is.atUs / US_PER_S)} s`;
    case 'handed':
      return `the hand leads, ${name} waits`;
    case 'over':
      return `${name} is over`;
  }
}

function ownCommands({ plan }: CompiledRig): Cast {
  return {
    leader: [],
    followers: plan.followers.map((spec, follower) => ({ follower, joints: spec.joints.map((_, j) => j) })),
  };
}

function timing(running: Player | null): string {
  if (running === null || running.late.count === 0) return 'nothing was sent';
  const { late } = running;
  const ms = (us: number): string => (us / 1e3).toFixed(2);
  return `${late.count} events, late by ${ms(late.quantileUs(0.5))} ms at the median, ${ms(late.quantileUs(0.99))} at p99, ${ms(late.worstUs)} at worst`;
}
