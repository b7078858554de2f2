// The reduced simulation study; the full one is scripts/simulation/run.mjs, its result scripts/simulation/RESULTS.md.
import { execFile } from 'node:child_process';
import { promisify } from 'node:util';
import { beforeAll, describe, expect, it } from 'vitest';

interface Comparison {
  readonly networks: number;
  readonly coverage: number;
  readonly coverageTrue: number;
  readonly rmseRatio: number;
  readonly meanSquaredZ: number;
  readonly meanSquaredZTrue: number;
}

interface Pooled {
  readonly quantities: Record<'d18O' | 'd2H' | 'dexcess', { averaged: Comparison; plugIn: Comparison }>;
  readonly turn: { readonly errorDeg: { readonly mean: number; readonly se: number } };
}

/** Not in the way of the runner's own messages while it waits. */
const inBackground = promisify(execFile);

const SIZE = { stations: 60, networks: 24, sites: 100, firstSeed: 7001 };

describe('simulated networks, paired with kriging under the true parameters', () => {
  let pooled: Pooled;
  beforeAll(async () => {
    const { stations, networks, sites, firstSeed } = SIZE;
    const size = [
      '--stations',
      stations,
      '--networks',
      networks,
      '--sites',
      sites,
      '--first-seed',
      firstSeed,
    ];
    const run = await inBackground(process.execPath, [
      'scripts/simulation/run.mjs',
      ...size.map(String),
      ...['--auto', '0', '--quiet'],
    ]);
    expect(run.stderr).toBe('');
    pooled = JSON.parse(run.stdout).stations[stations];
  }, 400_000);

  it.each(['d18O', 'd2H', 'dexcess'] as const)(
    '%s: 90 %% intervals cover what true parameters cover',
    (quantity) => {
      const { averaged, plugIn } = pooled.quantities[quantity];
      expect(averaged.networks).toBe(SIZE.networks);
      expect(Math.abs(averaged.coverage - averaged.coverageTrue)).toBeLessThanOrEqual(0.03);
      expect(averaged.rmseRatio).toBeLessThan(1.08);
      expect(Math.abs(averaged.meanSquaredZ - averaged.meanSquaredZTrue)).toBeLessThan(0.15);
      // The truth is hard enough to tell the two apart: without the average the intervals are too narrow.
      expect(plugIn.coverage).toBeLessThan(averaged.coverage);
    },
  );

  it('turn without bias', () => {
    const { errorDeg } = pooled.turn;
    expect(Math.abs(errorDeg.mean)).toBeLessThanOrEqual(3 * errorDeg.se);
  });
});
