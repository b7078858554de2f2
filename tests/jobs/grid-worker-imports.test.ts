/** What every thread of a grid, and every command, loads before it does anything. */
import { resolve } from 'node:path';
import { expect, test } from 'vitest';
import { staticImports } from '../support/static-imports.js';

test.each(['src/jobs/grid-worker.ts', 'src/cli/main.ts'])(
  '%s loads the parts of turf it needs, not all of it',
  (entry) => {
    const loaded = staticImports(entry);
    // The walk came to where turf's parts are imported
    expect(loaded).toContain(resolve('src/isoscape/support-hull.ts'));
    expect(loaded).toContain(resolve('src/jobs/grid-mask.ts'));
    expect(loaded).toContain('@turf/convex');
    expect([...loaded].filter((name) => /^@turf\/turf(\/|$)/.test(name))).toEqual([]);
  },
);
