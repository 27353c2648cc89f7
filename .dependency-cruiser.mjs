/**
 * Who may import whom. Each rule says what to do instead; `test/repository.test.ts` runs them over the
 * sources and over dist/, where imports of types are gone: rules on values look at dist/ alone.
 */

const CORE_VALUES = '^dist/messages/(assert|angles|bits|crc|frame|units)\\.js$';

export default {
  forbidden: [
    {
      name: 'messages-imports-zod-only',
      comment: 'The contract stands alone: move what it needs into messages/, or out of it.',
      severity: 'error',
      from: { path: '^(dist/)?messages/' },
      to: { pathNot: ['^(dist/)?messages/', '/zod/'] },
    },
    {
      name: 'onboard-core-is-pure',
      comment: 'The agent’s core takes types from messages/ and values from its zod-free files only; do I/O in the shell.',
      severity: 'error',
      from: { path: '^dist/onboard/core/' },
      to: { pathNot: ['^dist/onboard/core/', CORE_VALUES] },
    },
    {
      name: 'onboard-core-types',
      comment: 'Even types may come from messages/ and the core only.',
      severity: 'error',
      from: { path: '^(dist/)?onboard/core/' },
      to: { pathNot: ['^(dist/)?onboard/core/', '^(dist/)?messages/'] },
    },
    {
      name: 'onboard-knows-no-sea',
      comment: 'An agent runs at sea without the bench: share through messages/, or write the few lines twice.',
      severity: 'error',
      from: { path: '^(dist/)?onboard/' },
      to: { path: '^(dist/)?hil-sim/' },
    },
    {
      name: 'onboard-shell-libraries',
      comment: 'The onboard shell uses mqtt, rxjs, zod through messages/, and node: for arguments and signals.',
      severity: 'error',
      from: { path: '^(dist/)?onboard/[^/]+\\.[jt]s$' },
      to: {
        dependencyTypes: ['npm', 'npm-dev', 'npm-optional', 'npm-peer'],
        pathNot: ['/mqtt/', '/rxjs/'],
      },
    },
    {
      name: 'sea-is-pure',
      comment: 'The sea’s core takes types from messages/ and values from its zod-free files only; files and sockets belong to the shells.',
      severity: 'error',
      from: { path: '^dist/hil-sim/sea/' },
      to: { pathNot: ['^dist/hil-sim/sea/', CORE_VALUES] },
    },
    {
      name: 'sea-types',
      comment: 'Even types of the sea may come from messages/ and the sea only.',
      severity: 'error',
      from: { path: '^(dist/)?hil-sim/sea/' },
      to: { pathNot: ['^(dist/)?hil-sim/sea/', '^(dist/)?messages/'] },
    },
    {
      name: 'bench-starts-agents-as-processes',
      comment: 'Only the in-process runner may import the agent’s core; start a process, or go through hil-sim/run/in-process.ts.',
      severity: 'error',
      from: { path: '^(dist/)?hil-sim/', pathNot: '^(dist/)?hil-sim/run/in-process\\.[jt]s$' },
      to: { path: '^(dist/)?onboard/' },
    },
    {
      name: 'in-process-imports-the-core-only',
      comment: 'The in-process runner needs step and state, not the shell.',
      severity: 'error',
      from: { path: '^(dist/)?hil-sim/run/in-process\\.[jt]s$' },
      to: { path: '^(dist/)?onboard/', pathNot: '^(dist/)?onboard/core/(step|state)\\.[jt]s$' },
    },
    {
      name: 'no-cycles',
      comment: 'Two files that need each other are one idea, or three: split out what both need.',
      severity: 'error',
      from: {},
      to: { circular: true },
    },
    {
      name: 'nothing-imports-tests',
      comment: 'Move what the product needs out of test/.',
      severity: 'error',
      from: { path: '^(dist/)?(messages|onboard|hil-sim)/' },
      to: { path: '^test/' },
    },
    {
      name: 'no-dead-files',
      comment: 'Nothing uses this file: delete it, or use it.',
      severity: 'error',
      from: { orphan: true, path: '^(messages|onboard|hil-sim)/' },
      to: {},
    },
    {
      name: 'resolvable',
      comment: 'Every import must resolve to a file or an installed package.',
      severity: 'error',
      from: {},
      to: { couldNotResolve: true },
    },
  ],
  options: {
    doNotFollow: { path: 'node_modules' },
    tsPreCompilationDeps: true,
    parser: 'swc',
    enhancedResolveOptions: { exportsFields: ['exports'], conditionNames: ['import', 'node', 'default', 'types'] },
  },
};
