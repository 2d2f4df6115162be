import { filter, map, scan, share, Subject } from 'rxjs';
import type { Scene } from './scene.ts';
import { encoded, followerAtFirst, governed, paced, pulsed, remapped, settled } from './stock-follower.ts';
import { decoded, despiked, heardWhole, judged, leaderAtFirst, mapped, smoothed } from './stock-leader.ts';
import type { Way } from './way.ts';

/**
 * (c) The same stages as anybody would write them in RxJS: stock operators over pure functions, each making a fresh
 * object. Its commands equal (a)'s byte for byte as long as readings come and every pot is sound.
 */
export function stock(scene: Scene): Way {
  const { plan } = scene;
  const bytes$ = new Subject<{ readonly bytes: Uint8Array; readonly tUs: number }>();
  const sent = plan.followers.map((): Uint8Array => new Uint8Array(0));
  let commands = 0;

  const pose$ = bytes$.pipe(
    map(decoded),
    filter(heardWhole),
    scan(despiked(plan.leader), leaderAtFirst(plan.leader)),
    map(mapped(plan.leader)),
    scan(judged(plan.leader), leaderAtFirst(plan.leader)),
    scan(smoothed(plan.leader), leaderAtFirst(plan.leader)),
    share(),
  );
  plan.followers.forEach((spec, f) => {
    const atFirst = followerAtFirst(spec);
    pose$
      .pipe(
        map(remapped(spec)),
        scan(paced(spec), atFirst),
        filter((step) => step.due),
        scan(settled(spec), atFirst),
        scan(governed(spec), atFirst),
        map(pulsed(spec)),
        scan(encoded(spec), { sequence: -1, bytes: new Uint8Array(0) }),
      )
      .subscribe(({ bytes }) => {
        sent[f] = bytes;
        commands++;
      });
  });
  return {
    push: (bytes, nowUs) => bytes$.next({ bytes, tUs: nowUs[0] as number }),
    sent: (f) => sent[f] as Uint8Array,
    commands: () => commands,
  };
}
