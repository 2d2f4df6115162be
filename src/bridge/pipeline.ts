import { filter, map, Observable, type OperatorFunction, pipe, share, Subscription } from 'rxjs';
import type { Drive } from '../drive/drive.ts';
import type { DriveEvent } from '../drive/events.ts';
import type { FollowerStage } from '../drive/follower-stage.ts';
import type { LeaderStage } from '../drive/leader-stage.ts';

/** Takes a command to the wire. The stage that made it is the command: `kind`, and for a move `arm.frame`. */
export type Send = (command: FollowerStage) => void;

/** Told when a stage throws: a bug of ours, which ends that follower and no other. */
export type OnBug = (follower: FollowerStage, bug: unknown) => void;

/**
 * The way of one reading, for a live run, a trace and a replay alike: events, conditioned once, shared by all followers,
 * each of which makes its own commands and sends them through one guarded subscription.
 */
export function pipeline(events$: Observable<DriveEvent>, drive: Drive, send: Send, onBug: OnBug): Subscription {
  const conditioned$ = events$.pipe(
    conditioned(drive.leader),
    // A follower that fails must not start the stream anew for the others.
    share({ resetOnRefCountZero: false, resetOnComplete: false, resetOnError: false }),
  );
  const all = new Subscription();
  for (const follower of drive.followers) {
    all.add(
      conditioned$.pipe(followed(follower), delivered(send)).subscribe({
        error(bug) {
          follower.giveUp();
          onBug(follower, bug);
        },
      }),
    );
  }
  return all;
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

/** The commands of one follower: at most one an event, computed only when its port can take it. */
function followed(follower: FollowerStage): OperatorFunction<DriveEvent, FollowerStage> {
  return pipe(
    filter((event) => follower.take(event)),
    map(() => follower),
  );
}

/** Sending is part of the guarded stream: a wire that throws ends its follower too. */
function delivered(send: Send): OperatorFunction<FollowerStage, never> {
  return filter((command: FollowerStage): command is never => {
    send(command);
    return false;
  });
}
