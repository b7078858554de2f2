import { spawn } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, statSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';

const folder = mkdtempSync(join(tmpdir(), 'demo-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

/** Without blocking the test runner, which wants to be heard from every minute. */
async function runDemo(...args: string[]) {
  const child = spawn(process.execPath, ['scripts/demo/run.mjs', ...args]);
  const run = { stdout: '', stderr: '', status: null as number | null };
  child.stdout.setEncoding('utf8').on('data', (text: string) => (run.stdout += text));
  child.stderr.setEncoding('utf8').on('data', (text: string) => (run.stderr += text));
  run.status = await new Promise((resolve) => child.on('close', resolve));
  return run;
}

const OUTPUTS = [
  'README.md',
  'areas.csv',
  'check.json',
  'comparison.json',
  'grid.tif',
  'grid.tif.stac.json',
  'invented-areas.geojson',
  'invented-elevation.tif',
  'invented-layer.tif',
  'invented-records.csv',
  'invented-sites.csv',
  'invented-truth.csv',
  'isoscape.json',
  'sites.csv',
  'validation.html',
];

interface Comparison {
  readonly note: string;
  readonly scores: readonly {
    readonly quantity: string;
    readonly count: number;
    readonly coverage: number;
    readonly rmse: number;
    readonly baselineRmse: Readonly<Record<string, number>>;
  }[];
}

describe('npm run demo', () => {
  it('runs every verb, finds the planted mistakes and covers the truth it says it covers', async () => {
    const run = await runDemo('--out', folder);
    expect(run.stderr).toBe('');
    expect(run.status).toBe(0);
    for (const verb of ['check', 'fit', 'validate', 'sites', 'grid', 'area']) {
      expect(run.stdout).toContain(`$ npx rainprint ${verb} `);
    }
    expect(run.stdout).toContain('Invented:');
    expect(run.stdout).not.toContain('NOT FOUND');
    expect(run.stdout.match(/planted: /g)).toHaveLength(3);
    for (const name of OUTPUTS) expect(statSync(join(folder, name)).size, name).toBeGreaterThan(100);

    const comparison = JSON.parse(readFileSync(join(folder, 'comparison.json'), 'utf8')) as Comparison;
    expect(comparison.note).toContain('does not exist');
    expect(comparison.scores.map((score) => score.quantity)).toEqual(['d18O', 'd2H', 'dexcess']);
    for (const { count, coverage, rmse, baselineRmse } of comparison.scores) {
      expect(count).toBe(60);
      // 60 sites of one network: the binomial alone allows 90 ± 8 % (2 SE), and the truth is not the model's.
      expect(coverage).toBeGreaterThanOrEqual(0.75);
      expect(coverage).toBeLessThanOrEqual(0.99);
      for (const baseline of Object.values(baselineRmse)) expect(rmse).toBeLessThan(baseline);
    }
  }, 600_000);

  it('refuses a seed that is no number', async () => {
    const run = await runDemo('--seed', 'x', '--out', folder);
    expect(run.status).not.toBe(0);
    expect(run.stderr).toContain('--seed must be a whole number');
  });
});
