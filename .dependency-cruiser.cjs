/**
 * Which room may import which. A room imports only rooms above its row, so the way of one reading can be followed
 * downwards and never loops. Type-only imports count too (`tsPreCompilationDeps`): they tie rooms just as much.
 */

/** From the top down. `arm`, `draw`, `check`, `fit`, `take` and `panel` are planned rooms: their place is already kept. */
const rooms = [
  'clock',
  'map',
  'arm',
  'wire',
  'port',
  'leader',
  'follower',
  'drive',
  'rig',
  'sim',
  'bridge',
  'draw',
  'check',
  'fit',
  'take',
  'panel',
  'cli',
];

const inRooms = (names) => `^src/(${names.join('|')})/`;
const packages = (names) => `(^|/)node_modules/(${names.join('|')})/`;

/** A row imports no row below it. */
const onlyRoomsAbove = rooms.slice(0, -1).map((room, row) => ({
  name: `${room}-imports-only-rooms-above`,
  severity: 'error',
  from: { path: inRooms([room]) },
  to: { path: inRooms(rooms.slice(row + 1)) },
}));

/** Rooms made of plain functions: no socket, stream, timer or file. */
const pure = ['clock', 'map', 'arm', 'wire', 'leader', 'follower', 'drive'];

module.exports = {
  forbidden: [
    ...onlyRoomsAbove,
    // Two rules, because a stray file may only import or only be imported.
    {
      name: 'every-file-lives-in-a-room',
      severity: 'error',
      from: { path: '^src/', pathNot: [inRooms(rooms), '^src/index\\.ts$'] },
      to: {},
    },
    {
      name: 'every-import-lives-in-a-room',
      severity: 'error',
      from: {},
      to: { path: '^src/', pathNot: [inRooms(rooms), '^src/index\\.ts$'] },
    },
    {
      name: 'public-surface-last',
      severity: 'error',
      from: { path: '^src/' },
      to: { path: '^src/index\\.ts$' },
    },
    {
      name: 'fit-and-take-apart',
      severity: 'error',
      from: { path: inRooms(['fit', 'take']) },
      to: { path: inRooms(['fit', 'take']), pathNot: '^src/$1/' },
    },
    {
      name: 'kernels-see-wire-types-only',
      comment: 'A kernel speaks of readings and frames as data; codecs belong to the bridge.',
      severity: 'error',
      from: { path: inRooms(['leader', 'follower', 'drive']) },
      to: { path: inRooms(['wire']), dependencyTypesNot: ['type-only'] },
    },
    {
      name: 'kernels-know-no-port',
      severity: 'error',
      from: { path: inRooms(['leader', 'follower', 'drive']) },
      to: { path: inRooms(['port']) },
    },
    {
      name: 'pure-rooms-stay-pure',
      comment: 'Sockets, streams, files and packages enter below drive.',
      severity: 'error',
      from: { path: inRooms(pure) },
      to: { dependencyTypes: ['core', 'npm'] },
    },
    {
      name: 'streams-start-at-the-bridge',
      severity: 'error',
      from: { path: inRooms(rooms.slice(0, rooms.indexOf('bridge'))) },
      to: { path: packages(['rxjs']) },
    },
    {
      name: 'ports-behind-the-port-room',
      severity: 'error',
      from: { path: '^src/', pathNot: inRooms(['port', 'panel']) },
      to: { path: [packages(['serialport', '@serialport']), '^(node:)?(net|dgram)$'] },
    },
    {
      name: 'time-is-injected',
      severity: 'error',
      from: { path: '^src/' },
      to: { path: '^(node:)?(timers|timers/promises|perf_hooks)$' },
    },
    {
      name: 'no-circles',
      severity: 'error',
      from: {},
      to: { circular: true },
    },
    {
      name: 'product-apart-from-its-tests',
      severity: 'error',
      from: { path: '^src/' },
      to: { path: '^(tests|tools)/' },
    },
    {
      name: 'product-needs-no-dev-package',
      severity: 'error',
      from: { path: '^src/' },
      to: { dependencyTypes: ['npm-dev', 'npm-no-pkg', 'npm-unknown'], dependencyTypesNot: ['type-only'] },
    },
    {
      name: 'everything-resolves',
      severity: 'error',
      from: {},
      to: { couldNotResolve: true },
    },
  ],
  options: {
    doNotFollow: { path: 'node_modules' },
    tsPreCompilationDeps: true,
    enhancedResolveOptions: { exportsFields: ['exports'], conditionNames: ['import', 'node', 'default', 'types'] },
  },
};
