import { existsSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { rerunCommand } from '../../src/cli/validate/rerun-command.js';
import { readIsoscape } from '../../src/isoscape/index.js';
import { validateIsoscape } from '../../src/isoscape/validate.js';
import { runCaptured } from '../support/captured-run.js';
import { fitInvented } from '../support/fitted-isoscape.js';
import { temporaryFolder } from '../support/temp-folder.js';

const folder = temporaryFolder();
const at = (name: string) => join(folder, name);
/** Held parameters: a refit takes milliseconds. */
const HELD = ['along', 'across'].flatMap((field) =>
  ['range_km=300', 'sill=0.2', 'nugget=0.05'].flatMap((value) => ['--fix', `${field}.${value}`]),
);

describe('rainprint validate', () => {
  let path: string;
  beforeAll(async () => {
    ({ path } = await fitInvented(folder, 'isoscape', { seed: 9 }, [...HELD, '--fix', 'turn=10']));
  });

  it('prints both schemes, every predictor and the notes', async () => {
    const run = await runCaptured(['validate', path, '--folds', '5']);
    expect(run).toMatchObject({ exitCode: 0, stderr: '' });
    for (const part of [
      'Leave-one-out (nearest station left in:',
      'Blocked, 5 folds refitted',
      /^δ18O +isoscape +25 +\d\.\d{3} /m,
      /^ +regression only {3}25/m,
      /^d-excess {2}isoscape/m,
      /^note: leave-one-out holds the covariance parameters/m,
      'Leave-one-out errors beyond 3 SD: ',
      '50 % covers',
    ]) {
      expect(run.stdout).toMatch(part);
    }
  });

  it('prints the numbers of the library', async () => {
    const isoscape = readIsoscape(readFileSync(path, 'utf8'));
    const result = validateIsoscape(isoscape, { folds: 5 });
    const { stdout } = await runCaptured(['validate', path, '--folds', '5', '--json']);
    const json = JSON.parse(stdout);
    const own = result.blocked.variables[2].methods[0];
    expect(json.blocked.scores[8]).toMatchObject({
      variable: 'dexcess',
      method: 'isoscape',
      stations: 25,
      rmse_permil: own.scores.rmse,
      crps_permil: own.scores.crps,
    });
    expect(json.isoscape_id).toBe(isoscape.id);
    expect(json.predictions).toHaveLength(2 * 3 * 4);
    const text = (await runCaptured(['validate', path, '--folds', '5'])).stdout;
    expect(text).toContain(own.scores.rmse.toFixed(3));
  });

  it('gives d-excess as printed δ2H − 8 printed δ18O, station by station', async () => {
    const { stdout } = await runCaptured(['validate', path, '--folds', '5', '--json']);
    const { predictions, station_ids } = JSON.parse(stdout);
    type Series = {
      scheme: string;
      variable: string;
      method: string;
      observed_permil: number[];
      predicted_permil: number[];
    };
    const find = (scheme: string, variable: string) =>
      (predictions as Series[]).find(
        (each) => each.scheme === scheme && each.variable === variable && each.method === 'isoscape',
      )!;
    for (const scheme of ['leave-one-out', 'blocked']) {
      const [d18O, d2H, d] = ['d18O', 'd2H', 'dexcess'].map((variable) => find(scheme, variable));
      for (let i = 0; i < station_ids.length; i++) {
        for (const key of ['observed_permil', 'predicted_permil'] as const) {
          expect(Math.abs(d[key][i] - (d2H[key][i] - 8 * d18O[key][i]))).toBeLessThanOrEqual(1e-9);
        }
      }
    }
  });

  it('writes scores and report as whole files and nothing else', async () => {
    const before = readdirSync(folder);
    const run = await runCaptured([
      'validate',
      path,
      '--folds',
      '3',
      '-o',
      at('scores.txt'),
      '--report',
      at('out.html'),
    ]);
    expect(run).toEqual({ exitCode: 0, stdout: '', stderr: '' });
    expect(
      readdirSync(folder)
        .filter((name) => !before.includes(name))
        .sort(),
    ).toEqual(['out.html', 'scores.txt']);
    expect(readFileSync(at('scores.txt'), 'utf8')).toContain('Blocked, 3 folds');
    const page = readFileSync(at('out.html'), 'utf8');
    expect(page).toContain('rainprint validate isoscape.json --folds 3 --level 0.9 --report out.html');
    expect(page).not.toContain(folder);
  });

  it('takes parameters for known with --plug-in, and says so', async () => {
    const run = await runCaptured(['validate', path, '--folds', '3', '--plug-in']);
    expect(run.stdout).toContain('estimated parameters taken for known');
  });

  it('shows progress on a terminal only', async () => {
    expect((await runCaptured(['validate', path, '--folds', '3'], true)).stderr).toContain('validating');
  });

  it.each([
    [['--folds', '1'], 'OPTION_INVALID', '2 to 12'],
    [['--folds', '13'], 'OPTION_INVALID', '2 to 12'],
    [['--folds', 'ten'], 'OPTION_INVALID', '--folds ten'],
    [['--folds', '-3'], 'OPTION_INVALID', 'folds'],
    [['--level', '90'], 'OPTION_INVALID', '--level 90'],
    [['--level', '0'], 'OPTION_INVALID', '--level 0'],
    [['-o', 'same.txt', '--report', './same.txt'], 'OPTION_INVALID', 'two outputs'],
    [['--report', '/no/such/folder/x.html'], 'OUTPUT_PATH_INVALID', '/no/such/folder/x.html'],
  ])('refuses %j', async (flags, code, part) => {
    const run = await runCaptured(['validate', path, ...flags]);
    expect(run.exitCode).toBe(2);
    expect(run.stdout).toBe('');
    expect(run.stderr).toMatch(new RegExp(`^rainprint: ${code}: .+\n$`));
    expect(run.stderr).toContain(part);
  });

  it('never writes over the isoscape it reads, and leaves no half file behind', async () => {
    const original = readFileSync(path, 'utf8');
    const run = await runCaptured(['validate', path, '--report', path]);
    expect(run.stderr).toContain('OUTPUT_IS_INPUT');
    expect(readFileSync(path, 'utf8')).toBe(original);
    const failed = await runCaptured(['validate', path, '--folds', '99', '--report', at('half.html')]);
    expect(failed.exitCode).toBe(2);
    expect(existsSync(at('half.html'))).toBe(false);
    expect(readdirSync(folder).filter((name) => name.endsWith('.tmp'))).toEqual([]);
  });

  it('says what is wrong with a file that is no isoscape', async () => {
    writeFileSync(at('table.csv'), 'id,lon,lat\n');
    for (const [name, code] of [
      ['none.json', 'FILE_NOT_FOUND'],
      ['table.csv', 'ISOSCAPE_NOT_JSON'],
    ]) {
      const run = await runCaptured(['validate', at(name)]);
      expect(run.exitCode).toBe(2);
      expect(run.stderr).toContain(`rainprint: ${code}: `);
    }
  });
});

describe('rerunCommand', () => {
  const result = { folds: [0, 1], level: 0.95, plugIn: true } as never;
  it.each([
    ['iso.json', '', 'rainprint validate iso.json --folds 2 --level 0.95 --plug-in'],
    [
      'my iso.json',
      'r.html',
      "rainprint validate 'my iso.json' --folds 2 --level 0.95 --plug-in --report r.html",
    ],
    ["a'b; rm x", '', "rainprint validate 'a'\\''b; rm x' --folds 2 --level 0.95 --plug-in"],
    ['--json', '', "rainprint validate ./'--json' --folds 2 --level 0.95 --plug-in"],
  ])('of %j', (isoscape, report, expected) => {
    expect(rerunCommand(isoscape, result, report)).toBe(expected);
  });
});
