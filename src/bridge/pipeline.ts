import { filter, Observable, type OperatorFunction, type Subscriber, Subscription } from 'rxjs';
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
  const conditioned$ = events$.pipe(conditioned(drive.leader), shared());
  const all = new Subscription();
  for (const follower of drive.followers) {
    all.add(
      conditioned$.pipe(followed(follower, send)).subscribe({
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

/**
 * One subscription for all followers, whoever of them leaves. The stock `share` would make an object for each of them at
 * every event (RxJS as Node loads it walks subscribers by an iterator), and garbage must not grow with the troupe.
 */
function shared<T>(): OperatorFunction<T, T> {
  return (source$) => {
    let heard: readonly Subscriber<T>[] = [];
    let connected = false;
    return new Observable((out) => {
      heard = [...heard, out];
      if (!connected) {
        connected = true;
        source$.subscribe({
          next(value) {
            const now = heard;
            for (let k = 0; k < now.length; k++) (now[k] as Subscriber<T>).next(value);
          },
          error: (bug) => heard.forEach((one) => one.error(bug)),
          complete: () => heard.forEach((one) => one.complete()),
        });
      }
      return () => {
        heard = heard.filter((one) => one !== out);
      };
    });
  };
}

/**
 * One follower: at most one command an event, computed only when its port can take it, and sent at once. One operator
 * guards both, so that a stage that throws, or a wire, ends this follower's stream and no other.
 */
function followed(follower: FollowerStage, send: Send): OperatorFunction<DriveEvent, never> {
  return filter((event): event is never => {
    if (follower.take(event)) send(follower);
    return false;
  });
}
