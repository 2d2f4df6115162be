import { Observable, type Observer, type OperatorFunction, type Subscription } from 'rxjs';
import type { Drive } from '../drive/drive.ts';
import type { DriveEvent } from '../drive/events.ts';
import type { FollowerStage } from '../drive/follower-stage.ts';
import type { LeaderStage } from '../drive/leader-stage.ts';

/** Takes a command to the wire. The stage that made it is the command: `kind`, and for a move `arm.frame`. */
export type Send = (command: FollowerStage) => void;

/** Told when a stage throws: a bug of ours, which ends that follower and no other. */
export type OnBug = (follower: FollowerStage, bug: unknown) => void;

/**
 * The way of one reading, for a live run, a trace and a replay alike: events, conditioned once, then every follower in
 * rig order, each of which makes its own commands and sends them.
 */
export function pipeline(events$: Observable<DriveEvent>, drive: Drive, send: Send, onBug: OnBug): Subscription {
  return events$.pipe(conditioned(drive.leader)).subscribe(followed(drive.followers, send, onBug));
}

/** The leader's stage sees each event first; what its buttons stand for goes on before it: a stop waits for no step. */
function conditioned(leader: LeaderStage): OperatorFunction<DriveEvent, DriveEvent> {
  return (events$) =>
    new Observable((out) =>
      events$.subscribe({
        next(event) {
          try {
            leader.take(event);
          } catch (bug) {
            // Nobody can follow a leader that failed; unguarded, it would end the program on a later turn instead.
            leader.giveUp();
            out.error(bug);
            return;
          }
          for (let k = 0; k < leader.pressedCount; k++) out.next(leader.pressed[k] as DriveEvent);
          out.next(event);
        },
        error: (bug) => out.error(bug),
        complete: () => out.complete(),
      }),
    );
}

/**
 * Every follower sees every event and makes at most one command of it, computed only when its port can take it, and sent
 * at once. A stage that throws, or a wire, ends its own follower and no other. One guarded loop, not a stream for each:
 * RxJS would cost 64 arms a tenth of their time, and say nothing that the loop does not.
 */
function followed(all: readonly FollowerStage[], send: Send, onBug: OnBug): Partial<Observer<DriveEvent>> {
  let following = all;
  const end = (follower: FollowerStage, bug: unknown): void => {
    following = following.filter((one) => one !== follower);
    follower.giveUp();
    onBug(follower, bug);
  };
  return {
    next(event) {
      const now = following;
      for (let f = 0; f < now.length; f++) {
        const follower = now[f] as FollowerStage;
        try {
          if (follower.take(event)) send(follower);
        } catch (bug) {
          end(follower, bug);
        }
      }
    },
    error(bug) {
      for (const follower of following) end(follower, bug);
    },
  };
}
