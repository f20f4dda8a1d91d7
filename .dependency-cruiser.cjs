/** The house: data flows one way. A folder imports only from those to its left, and from shared/. */
const stages = ['ingest', 'clean', 'estimate', 'alignment', 'fuse', 'report'];

/** A stage must not import stages to its right, nor the store, jobs, http or the entry points. */
const stageRules = stages.map((stage, i) => ({
  name: `stage-${stage}-imports-only-leftwards`,
  severity: 'error',
  from: { path: `^server/${stage}/` },
  to: { path: `^server/(${[...stages.slice(i + 1), 'store', 'jobs', 'http', '[^/]+\\.ts$'].join('|')})` },
}));

module.exports = {
  forbidden: [
    ...stageRules,
    {
      name: 'shared-imports-only-shared',
      severity: 'error',
      comment: 'shared/ runs in the browser and the server alike',
      from: { path: '^shared/' },
      to: { path: '^(server|client|data|tests)/' },
    },
    {
      name: 'shared-is-pure',
      severity: 'error',
      from: { path: '^shared/' },
      to: { dependencyTypes: ['core'] },
    },
    {
      name: 'client-imports-only-shared',
      severity: 'error',
      from: { path: '^client/' },
      to: { path: '^(server|data|tests)/' },
    },
    {
      name: 'server-never-imports-client-or-tests',
      severity: 'error',
      from: { path: '^server/' },
      to: { path: '^(client|tests)/' },
    },
    {
      name: 'store-knows-no-stage',
      severity: 'error',
      from: { path: '^server/store/' },
      to: { path: `^server/(${stages.join('|')}|jobs|http|[^/]+\\.ts$)` },
    },
    {
      name: 'formulas-know-no-assessment',
      severity: 'error',
      from: { path: '^shared/(curving|units|model)' },
      to: { path: '^shared/(assess|limits)/' },
    },
    {
      name: 'no-circular',
      severity: 'error',
      from: {},
      to: { circular: true, viaOnly: { dependencyTypesNot: ['type-only'] } },
    },
    {
      name: 'no-dev-package-in-the-program',
      severity: 'error',
      from: { path: '^(server|shared)/' },
      to: { dependencyTypes: ['npm-dev'] },
    },
  ],
  options: {
    doNotFollow: { path: 'node_modules' },
    exclude: { path: '^dist/' },
    tsConfig: { fileName: 'tsconfig.json' },
    tsPreCompilationDeps: true,
    enhancedResolveOptions: { extensions: ['.ts', '.tsx', '.mjs', '.js', '.json'] },
  },
};
