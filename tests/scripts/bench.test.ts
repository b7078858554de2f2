// The benchmarks run at a tiny size, so that they cannot rot; what they measure is nobody's test.
import { execFile } from 'node:child_process';
import { readdirSync } from 'node:fs';
import { promisify } from 'node:util';
import { describe, expect, it } from 'vitest';

const TITLES = {
  'big-network': 'big network: approximate fit, predictions from nearby stations',
  cog: 'cog: writing the file, seven bands',
  exact: 'exact: mean and variance of every cell, one field, one thread',
  'fine-grid': 'fine-grid: worldwide at 5′, a piece of land at 30″',
  fit: 'fit: both fields, restricted likelihood',
  kernels: 'kernels: dense algebra of one thread',
  'near-far': 'near-far: worldwide grids at 10′, seven bands, two threads',
  sites: 'sites: 10,000 places by the library',
};
/** With a peer its ratio stands there, without it the reason why not. */
const COMPARED: { readonly [name: string]: RegExp } = {
  cog: /ours \/ peer = \d|peer skipped: gdal_translate is not installed/,
  exact: /ours \/ numpy = \d|numpy skipped: scipy is not installed/,
  fit: /ours \/ peer = \d|peer skipped: scikit-learn is not installed/,
  'near-far': /× faster|gstat skipped: it is not installed/,
  sites: /ours plug-in \/ numpy = \d|numpy skipped: scipy is not installed/,
};
/** Whole commands are run, some in a row. */
const TIMEOUT_MS = 600_000;

async function tiny(...args: string[]) {
  const run = promisify(execFile);
  return (await run(process.execPath, ['scripts/bench/run.mjs', '--tiny', ...args], { encoding: 'utf8' }))
    .stdout;
}

describe('benchmarks', () => {
  it('are all listed here', () => {
    const found = readdirSync('scripts/bench').filter((name) => name.endsWith('.bench.mjs'));
    expect(found.map((name) => name.replace('.bench.mjs', '')).sort()).toEqual(Object.keys(TITLES).sort());
  });

  it.each(Object.entries(TITLES))(
    '%s runs at a tiny size and checks its result before it times',
    async (name, title) => {
      const text = await tiny(name);
      expect(text).toContain(`# ${title}`);
      expect(text).toMatch(COMPARED[name] ?? /\d/);
      expect(text).not.toMatch(/NaN|undefined/);
    },
    TIMEOUT_MS,
  );

  it('refuse a name that is none of theirs', async () => {
    await expect(tiny('fastest')).rejects.toThrow(
      /no benchmark is named fastest; there are big-network, cog, exact/,
    );
  });
});
