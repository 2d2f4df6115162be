import { pipeline } from '../../src/bridge/pipeline.ts';
import { eventSource } from '../../src/bridge/source.ts';
import { stamps } from '../../src/bridge/stamps.ts';
import { type Drive, drive as makeDrive } from '../../src/drive/drive.ts';
import type { FollowerStage } from '../../src/drive/follower-stage.ts';
import { openSession } from '../../src/wire/session.ts';
import type { Emit } from '../../src/wire/types.ts';
import { greeting, JOINTS, type Scene, START_US } from './scene.ts';
import type { Way } from './way.ts';

/** (a) The program itself: wire, stamps, source, pipeline, wire, as a live run joins them, without the ports. */
export function whole(scene: Scene): Way & { readonly drive: Drive } {
  const { plan } = scene;
  const starts = plan.followers.map((_, f) => ({ poseRad: null, unasked: true, awake: true, board: f }));
  const drive = makeDrive(plan, starts, START_US);
  const source = eventSource(drive, null, START_US);
  const readings = stamps(JOINTS, source.push);
  const leader = openSession(scene.wire, scene.leaderBoard);
  const followers = scene.followerBoards.map((board) => openSession(scene.wire, board));
  const out = followers.map((session) => new Uint8Array(session.frameBytesMax(0)));
  const lengths = new Uint16Array(out.length);
  const now = { us: 0 };
  let commands = 0;

  const hear: Emit = (event) => {
    if (event.kind === 'reading') readings.add(now.us, event.counts, event.boardUs);
  };
  const send = (command: FollowerStage): void => {
    const f = command.index;
    lengths[f] = (followers[f] as (typeof followers)[number]).encode(0, command.arm.frame, out[f] as Uint8Array);
    commands++;
  };
  pipeline(source.events$, drive, send, (_, bug) => {
    throw bug;
  });
  leader.open(hear);
  if (scene.wire.name === 'frames') leader.push(greeting(), hear);

  return {
    drive,
    push(chunk, nowUs) {
      now.us = nowUs[0] as number;
      leader.push(chunk, hear);
      readings.flush(now.us);
    },
    sent: (f) => (out[f] as Uint8Array).subarray(0, lengths[f]),
    commands: () => commands,
  };
}
