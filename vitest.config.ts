import { defineConfig } from 'vitest/config';

/** A room's test is quick; firmware in an emulator and real ptys are not. */
const ROOM_TEST_MS = 10_000;
const BOARD_TEST_MS = 300_000;

export default defineConfig({
  test: {
    watch: false,
    pool: 'forks',
    maxWorkers: 2,
    globalSetup: ['tests/seed-of-run.ts'],
    setupFiles: ['tests/seeds.ts'],
    projects: [
      {
        extends: true,
        test: {
          name: 'rooms',
          include: ['tests/**/*.test.ts'],
          exclude: ['tests/boards/**', 'tests/smoke/**'],
          testTimeout: ROOM_TEST_MS,
          hookTimeout: ROOM_TEST_MS,
          sequence: { groupOrder: 0 },
        },
      },
      {
        extends: true,
        test: {
          name: 'boards',
          include: ['tests/boards/**/*.test.ts'],
          testTimeout: BOARD_TEST_MS,
          hookTimeout: BOARD_TEST_MS,
          sequence: { groupOrder: 1 },
        },
      },
      {
        extends: true,
        test: {
          name: 'smoke',
          include: ['tests/smoke/**/*.test.ts'],
          testTimeout: BOARD_TEST_MS,
          hookTimeout: BOARD_TEST_MS,
          fileParallelism: false,
          sequence: { groupOrder: 2 },
        },
      },
    ],
  },
});
