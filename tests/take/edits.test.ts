import { existsSync, readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import fc from 'fast-check';
import { beforeAll, describe, expect, it } from 'vitest';
import { compare } from '../../src/take/compare.ts';
import { type Work, momentUs, stretchOf } from '../../src/take/derive.ts';
import { retime, splice, trim } from '../../src/take/edit.ts';
import { isTakeFault, takeSentence } from '../../src/take/fault.ts';
import type { Take } from '../../src/take/reader.ts';
import { resampled } from '../../src/take/resample.ts';
import type { Row } from '../../src/take/row.ts';
import { smooth } from '../../src/take/smooth.ts';
import { summarize, type TakeSummary } from '../../src/take/summary.ts';
import { fileWriter, filmed, headerOf, opened, rowsOf, takesFolderForTests, TWO_ARMS } from './studio.ts';

const folder = takesFolderForTests();
let take: Take;

beforeAll(async () => {
  const { performance, recorder } = filmed(folder, 'raw');
  performance.run(3_000_000);
  recorder.mark('bow');
  performance.live.key('mark');
  performance.run(5_000_000);
  await recorder.end();
  take = opened(join(folder, 'raw.arrows'));
});

function finish<T>(work: Work<T>): T {
  let step = work.next();
  while (step.done !== true) step = work.next();
  const made = step.value as object;
  if (isTakeFault(made)) throw new Error(takeSentence(made));
  return made as T;
}

function faultOf(work: Work<unknown>): string {
  let step = work.next();
  while (step.done !== true) step = work.next();
  const made = step.value as object;
  return isTakeFault(made) ? made.code : 'done';
}

function summaryOf(of: Take): TakeSummary {
  const work = summarize(of);
  let step = work.next();
  while (step.done !== true) step = work.next();
  return step.value;
}

function made(name: string): Take {
  return opened(join(folder, `${name}.arrows`));
}

describe('trim', () => {
  it('keeps the rows of a stretch, from 0 on, and remembers its parent', () => {
    const stretch = stretchOf(take, 'bow', '-1s');
    if (isTakeFault(stretch)) throw new Error(takeSentence(stretch));
    expect(stretch).toEqual({ fromUs: 3_000_000, toUs: take.durationUs - 1_000_000 });
    finish(trim(folder, 'trimmed', take, stretch));
    const wanted = rowsOf(take).filter(({ tUs }) => tUs >= stretch.fromUs && tUs <= stretch.toUs);
    const got = rowsOf(made('trimmed'));
    expect(got).toHaveLength(wanted.length);
    got.forEach((row, i) => {
      expect(row).toEqual({ ...wanted[i], tUs: (wanted[i] as Row).tUs - 3_000_000 });
    });
    expect(made('trimmed').header.made).toEqual({
      by: 'trim',
      posed: false,
      parents: [{ take: 'raw', rows: take.rows }],
      how: { from_s: 3, to_s: stretch.toUs / 1e6 },
    });
    expect(made('trimmed').marks).toEqual([{ name: 'bow', tUs: 0 }]);
  });

  it('refuses stretches that are none', () => {
    const code = (from: string, to: string): string => {
      const stretch = stretchOf(take, from, to);
      return isTakeFault(stretch) ? stretch.code : 'a stretch';
    };
    expect(code('2s', '1s')).toBe('TAKE_RANGE');
    expect(code('0s', '99s')).toBe('TAKE_RANGE');
    expect(code('curtain', '1s')).toBe('TAKE_MARK');
    expect(momentUs(take, '1500ms')).toBe(1_500_000);
  });

  it('never writes over a take, and leaves nothing beside it', () => {
    const before = readFileSync(join(folder, 'raw.arrows'));
    expect(faultOf(trim(folder, 'raw', take, { fromUs: 0, toUs: 1_000_000 }))).toBe('TAKE_EXISTS');
    expect(readFileSync(join(folder, 'raw.arrows')).equals(before)).toBe(true);
    expect(readdirSync(folder).filter((name) => name.startsWith('.'))).toEqual([]);
  });

  it('broken off in the middle leaves no half take', () => {
    const long = fileWriter(folder, 'long', headerOf(TWO_ARMS));
    for (let i = 0; i < 30_000; i++) {
      long.row.tUs = i * 1000;
      long.append();
    }
    return long.end().then(() => {
      const work = trim(folder, 'half', made('long'), { fromUs: 0, toUs: 29_000_000 });
      expect(work.next().done).toBe(false);
      work.return({ take: '', rows: 0 });
      expect(existsSync(join(folder, 'half.arrows'))).toBe(false);
      expect(readdirSync(folder).filter((name) => name.startsWith('.'))).toEqual([]);
    });
  });

  it.each([['../out'], ['a/b'], ['..'], ['.hidden'], ['a..b'], ['con'], ['x'.repeat(80)], [''], ['a\\b']])(
    'refuses the name %j',
    (name) => {
      expect(faultOf(trim(folder, name, take, { fromUs: 0, toUs: 1_000_000 }))).toBe('TAKE_NAME');
    },
  );
});

describe('retime', () => {
  it('keeps the law of time scaling: times by 1/s, speeds by s, accelerations by s squared', () => {
    // J. M. Hollerbach, ASME J. Dyn. Sys. 106 (1984) 102-106: a path run k times as fast has k times the speed and
    // k squared times the acceleration.
    const raw = summaryOf(take);
    finish(retime(folder, 'half-speed', take, 0.5));
    const slow = summaryOf(made('half-speed'));
    expect(slow.duration_s).toBeCloseTo(2 * raw.duration_s, 5);
    expect(slow.rows).toBe(raw.rows);
    slow.followers.forEach((arm, f) => {
      arm.joints.forEach((joint, j) => {
        const before = raw.followers[f]?.joints[j];
        expect(joint.speed_deg_s).toBeCloseTo((before?.speed_deg_s ?? 0) / 2, 4);
        expect(joint.accel_deg_s2 / (before?.accel_deg_s2 ?? 1)).toBeCloseTo(1 / 4, 4);
        expect(joint.most_deg).toBe(before?.most_deg);
      });
    });
  });
});

describe('splice', () => {
  it('joins the end of one take to the start of another without a jump in angle or speed', () => {
    finish(splice(folder, 'twice', take, take, 1));
    const twice = made('twice');
    expect(twice.durationUs).toBe(2 * take.durationUs + 1_000_000);
    expect(twice.header.made.parents).toHaveLength(2);
    const near = rowsOf(twice).filter(
      ({ tUs }) => tUs >= take.durationUs - 100_000 && tUs <= take.durationUs + 1_100_000,
    );
    const jumps = near.slice(1).flatMap((row, i) => {
      const before = near[i] as Row;
      const dt = (row.tUs - before.tUs) / 1e6;
      return row.followers.flatMap((arm, f) =>
        Array.from(arm.angleRad, (angle, j) => {
          const last = before.followers[f];
          const moved = Math.abs(angle - (last?.angleRad[j] ?? Number.NaN));
          const speed = Math.max(Math.abs(arm.speedRadS[j] ?? 0), Math.abs(last?.speedRadS[j] ?? 0));
          // Between two rows an angle moves as its speeds say. Recorded commands come at 50 Hz, so one moves by up to
          // a period's worth in the row that follows.
          return moved - (1.3 * speed * Math.max(dt, 0.021) + 2e-3);
        }),
      );
    });
    expect(near.length).toBeGreaterThan(100);
    expect(Math.max(...jumps)).toBeLessThanOrEqual(0);
  });
});

describe('smooth', () => {
  it('says how far it is from the raw take, which is little when only tremor goes', () => {
    const { joints, rows } = finish(smooth(folder, 'smoothed', take, 4));
    expect(rows).toBe(take.rows);
    expect(joints.map(({ joint }) => joint)).toEqual([
      'leader.base',
      'leader.elbow',
      'wren.base',
      'wren.elbow',
      'stork.base',
      'stork.elbow',
    ]);
    for (const { rms_deg, worst_deg } of joints) {
      expect(rms_deg).toBeGreaterThan(0);
      expect(worst_deg).toBeLessThan(2);
      expect(rms_deg).toBeLessThan(worst_deg);
    }
    const [raw, smoothed] = [summaryOf(take), summaryOf(made('smoothed'))];
    for (const f of [0, 1]) {
      expect(smoothed.followers[f]?.spectral_arc_length).toBeGreaterThanOrEqual(
        (raw.followers[f]?.spectral_arc_length ?? 0) - 0.01,
      );
    }
  });

  it('leaves a slow sine where it was, and states the error of what it takes out', async () => {
    const writer = fileWriter(folder, 'sine', headerOf(TWO_ARMS));
    for (let i = 0; i <= 4000; i++) {
      const s = i / 200;
      writer.row.tUs = i * 5_000;
      writer.row.poseRad.fill(Math.sin(2 * Math.PI * 0.2 * s) + 0.01 * Math.sin(2 * Math.PI * 25 * s));
      for (const arm of writer.row.followers) arm.commanded = 1;
      writer.append();
    }
    await writer.end();
    const { joints } = finish(smooth(folder, 'sine-smooth', made('sine'), 5));
    // A 25 Hz ripple of amplitude 0.01 rad has an rms of 0.01 / sqrt 2 = 0.405 degrees, and nearly all of it goes.
    expect(joints[0]?.rms_deg).toBeCloseTo(0.405, 2);
    const middle = rowsOf(made('sine-smooth')).find(({ tUs }) => tUs === 10_000_000 + 250_000);
    expect(middle?.poseRad[0]).toBeCloseTo(Math.sin(2 * Math.PI * 0.2 * 10.25), 3);
  });
});

describe('resampling', () => {
  it('gives every instant of the rate once, in order, for any rate', () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 400 }), (rateHz) => {
        const instants = Array.from(resampled(take, rateHz), ({ tUs }) => tUs);
        expect(instants).toEqual(
          Array.from({ length: Math.floor((take.durationUs * rateHz) / 1e6) + 1 }, (_, k) =>
            Math.round((k * 1e6) / rateHz),
          ),
        );
      }),
      { numRuns: 20 },
    );
  });

  it('knows no angle before the first event, and each from then on', () => {
    const first = rowsOf(take)[0] as Row;
    expect(first.tUs).toBeGreaterThan(10_000);
    for (const { tUs, followers } of resampled(take, 100, 0, 2_000_000))
      for (const { angleRad, targetRad, speedRadS } of followers)
        for (const values of [angleRad, targetRad, speedRadS])
          expect(Array.from(values, (value) => !Number.isNaN(value))).toEqual([tUs >= first.tUs, tUs >= first.tUs]);
  });

  it('says the same from a moment on as from the beginning, wherever batches begin', () => {
    const whole = Array.from(resampled(take, 100), ({ followers }) => followers[0]?.angleRad[0]);
    fc.assert(
      fc.property(fc.integer({ min: 100, max: 700 }), (k) => {
        const some = Array.from(
          resampled(take, 100, k * 10_000, (k + 20) * 10_000),
          ({ followers }) => followers[0]?.angleRad[0],
        );
        // At either end a neighbour to come from may lie outside the stretch.
        expect(some.slice(4, 17)).toEqual(whole.slice(k + 4, k + 17));
      }),
      { numRuns: 40 },
    );
  });

  it('lies between the commands on either side', () => {
    const commands = rowsOf(take).filter(({ followers }) => followers[0]?.commanded === 1);
    for (const row of resampled(take, 137, 4_000_000, 6_000_000)) {
      const tUs = row.tUs + 4_000_000;
      const after = commands.find((command) => command.tUs >= tUs);
      const before = commands.findLast((command) => command.tUs <= tUs);
      if (after === undefined || before === undefined) continue;
      const [a, b] = [before.followers[0]?.angleRad[0] ?? 0, after.followers[0]?.angleRad[0] ?? 0];
      const value = row.followers[0]?.angleRad[0] ?? Number.NaN;
      expect(value).toBeGreaterThanOrEqual(Math.min(a, b) - 1e-9);
      expect(value).toBeLessThanOrEqual(Math.max(a, b) + 1e-9);
    }
  });
});

describe('compare', () => {
  it('finds no difference between a take and itself, whatever its speed', () => {
    const same = finish(compare(take, take));
    expect(same.joints.every(({ rms_deg, worst_deg }) => rms_deg === 0 && worst_deg === 0)).toBe(true);
    finish(retime(folder, 'slower', take, 0.8));
    const slower = finish(compare(take, made('slower')));
    expect(slower.length_ratio).toBeCloseTo(1.25, 4);
    for (const { joint, rms_deg } of slower.joints) expect([joint, rms_deg < 0.4]).toEqual([joint, true]);
  });

  it('finds an offset of one joint, of that size', async () => {
    const shifted = fileWriter(folder, 'shifted', take.header);
    for (const row of rowsOf(take)) {
      Object.assign(shifted.row, { tUs: row.tUs, event: row.event });
      shifted.row.poseRad.set(row.poseRad);
      row.followers.forEach((arm, f) => {
        const to = shifted.row.followers[f];
        to?.angleRad.set(arm.angleRad);
        if (f === 1 && to !== undefined) to.angleRad[1] = (arm.angleRad[1] ?? 0) + Math.PI / 90;
        Object.assign(to ?? {}, { commanded: arm.commanded });
      });
      shifted.append();
    }
    await shifted.end();
    const { joints } = finish(compare(take, made('shifted')));
    const offset = joints.find(({ joint }) => joint === 'stork.elbow');
    expect(offset?.rms_deg).toBeCloseTo(2, 6);
    expect(joints.find(({ joint }) => joint === 'stork.base')?.rms_deg).toBe(0);
  });
});

describe('a summary', () => {
  it('holds every follower inside its limits, and counts what the take has', () => {
    const { followers, rows, duration_s, marks, leader } = summaryOf(take);
    expect(rows).toBe(take.rows);
    expect(duration_s).toBe(take.durationUs / 1e6);
    expect(marks).toEqual([{ mark: 'bow', t_s: 3 }]);
    expect(leader.dropouts).toEqual([]);
    for (const arm of followers) {
      expect(arm.states.following).toBeGreaterThan(3);
      expect(arm.movements).toBeGreaterThan(0);
      expect(arm.spectral_arc_length).toBeLessThan(-1);
      for (const joint of arm.joints) {
        expect(joint.speed_share).toBeLessThanOrEqual(1 + 1e-6);
        // Speeds are kept as 32-bit floats.
        expect(joint.accel_share).toBeLessThanOrEqual(1 + 1e-3);
      }
    }
  });
});
