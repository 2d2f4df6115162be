import type { Drive } from '../../src/drive/drive.ts';
import type { DriveEvent } from '../../src/drive/events.ts';
import type { FollowerStage } from '../../src/drive/follower-stage.ts';

/** Hands one event to a drive without any stream: what `bridge/pipeline` does, in the fewest words. */
export function take(drive: Drive, event: DriveEvent, onCommand: (command: FollowerStage) => void): void {
  const { leader, followers } = drive;
  leader.take(event);
  const hand = (what: DriveEvent): void => {
    for (const follower of followers) if (follower.take(what)) onCommand(follower);
  };
  for (let k = 0; k < leader.pressedCount; k++) hand(leader.pressed[k] as DriveEvent);
  hand(event);
}
