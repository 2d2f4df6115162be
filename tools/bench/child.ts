import { measureBytes, measureTime } from './meter.ts';
import { useEs2015Build } from './rxjs-es2015.ts';
import { chunks, scene, type Scene } from './scene.ts';
import type { BytesOutcome, Task, TimeOutcome, WayName } from './task.ts';
import type { Way } from './way.ts';

/** Does one task in this process and nothing else: what a process has compiled before moves the next figure. */
export async function perform(task: Task): Promise<TimeOutcome | BytesOutcome> {
  if (task.es2015) useEs2015Build();
  const wire = task.way === 'hobby' || task.way === 'lines' ? 'lines' : 'frames';
  const way = await wayNamed(task.way, scene(task.followers, wire));
  // Some readings are only looked at, some measured twice.
  const bytes = chunks(wire, task.warmUp + 2 * task.readings + 100);
  return task.measure === 'bytes' ? measureBytes(task, way, bytes) : measureTime(task, way, bytes);
}

/** Only the way that is measured is loaded. */
async function wayNamed(name: WayName, scene: Scene): Promise<Way> {
  switch (name) {
    case 'whole':
    case 'lines':
      return (await import('./whole.ts')).whole(scene);
    case 'tight':
      return (await import('./tight.ts')).tight(scene);
    case 'stock':
      return (await import('./stock.ts')).stock(scene);
    case 'hobby':
      return (await import('./hobby.ts')).hobby(scene);
  }
}
