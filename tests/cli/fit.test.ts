import { existsSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { elevationEffect, latitudeEffect, readIsoscape } from '../../src/isoscape/index.js';
import { type CapturedRun, runCaptured } from '../support/captured-run.js';
import { inventNetwork } from '../support/invented-network.js';
import { temporaryFolder } from '../support/temp-folder.js';

const folder = temporaryFolder();
const QUICK = ['--family', 'exponential', '--terms', 'elevation'];
const at = (name: string) => join(folder, name);

describe('rainprint fit', () => {
  let run: CapturedRun;
  beforeAll(async () => {
    // One bad row, one station with one isotope only.
    const csv = `${inventNetwork({ seed: 3, stationCount: 30 }).csv}BAD,-30,-47,x,-5,-30,48,2,15\nONE,-29,-47,10,-5,,48,2,15\n`;
    writeFileSync(at('stations.csv'), csv);
    run = await runCaptured(['fit', at('stations.csv'), '-o', at('isoscape.json'), '--terms', 'auto']);
  });

  it('writes an isoscape that can be read again', () => {
    expect(run.exitCode).toBe(0);
    const isoscape = readIsoscape(readFileSync(at('isoscape.json'), 'utf8'));
    expect(isoscape.isotopes).toBe('both');
    expect(isoscape.stations.id).toHaveLength(30);
    expect(isoscape.oneIsotopeStationIds).toEqual(['ONE']);
    expect(isoscape.networkName).toBe('stations.csv');
  });

  it('says what was left out and where to see it', () => {
    expect(run.stderr).toContain('elevation-missing 1, one-isotope 1');
    expect(run.stderr).toContain(`rainprint check ${at('stations.csv')}`);
  });

  it('names the stations it kept although they were flagged', async () => {
    expect(run.stderr).not.toContain('kept although flagged'); // nothing was flagged
    const [header, ...rows] = inventNetwork({ seed: 3, stationCount: 30 }).csv.trim().split('\n');
    const columns = header.split(',');
    const far = rows.map((row, i) => {
      const cells = row.split(',');
      const [lon, lat] = [columns.indexOf('lon'), columns.indexOf('lat')];
      if (i === 4) [cells[lon], cells[lat]] = [cells[lat], cells[lon]];
      const swing = columns.indexOf('d2H');
      if (i > 20 && i < 28) cells[swing] = String(Number(cells[swing]) + 60);
      return cells.join(',');
    });
    writeFileSync(at('flagged.csv'), `${[header, ...far].join('\n')}\nLEFT,-30,-47,5,-8,20,2,2,15\n`);
    const { exitCode, stderr } = await runCaptured(['fit', at('flagged.csv'), '--json', ...QUICK]);
    const ids = far.map((row) => row.split(',')[0]);
    const odd = ids.slice(21, 26).map((id, i) => `${id} (line ${23 + i})`);
    expect(exitCode).toBe(0);
    expect(stderr).toContain(
      `kept although flagged: coordinates-perhaps-swapped ${ids[4]} (line 6); ` +
        `d-excess-station ${odd.join(', ')} and 2 more; see them with: rainprint check ${at('flagged.csv')}`,
    );
  });

  it('says on stderr which column of spread it did not find', async () => {
    const table = inventNetwork({ seed: 3, stationCount: 30 }).csv.replace('sd_d2H', 'Streuung');
    writeFileSync(at('half.csv'), table);
    const { exitCode, stderr } = await runCaptured(['fit', at('half.csv'), '--json', ...QUICK]);
    expect([exitCode, stderr]).toEqual([0, expect.stringContaining('found sd_d18O, n, but not sd_d2H')]);
  });

  it('ends with every part of the closing table', () => {
    for (const part of [
      'Stations: 30 used, 1 left out, 1 with one isotope only',
      'Sampling error of the means: from the standard deviations of the table, scale 1\n',
      /elevation, ‰ per 100 m +-\d\.\d+ ± \d\.\d+ +-\d\.\d+ ± \d\.\d+ +\d\.\d+ ± \d\.\d+/,
      /5 % distance +sill +nugget/,
      /along +[\d.]+ km +[\d.]+ km/,
      /across +[\d.]+ km +[\d.]+ km/,
      /Axes: along has slope .* turn -?[\d.]+° ± [\d.]+/,
      /leave-one-out, δ18O +RMSE ‰ +mean z² +90 % covers/,
      'leave-one-out, d-excess',
      'regression only',
      'nearest station',
      /trend \(maximum likelihood\) +log-likelihood +parameters +ΔAICc/,
      /covariance family +restricted log-likelihood/,
      /note: the trend terms were chosen from the same data .* intervals do not contain/,
    ]) {
      expect(run.stdout).toMatch(part);
    }
  });

  it('prints the same numbers as JSON', async () => {
    const fixed = ['--family', 'exponential', '--terms', 'zonal1,elevation'];
    const json = await runCaptured(['fit', at('stations.csv'), '-o', at('again.json'), ...fixed, '--json']);
    expect(json.exitCode).toBe(0);
    const summary = JSON.parse(json.stdout);
    const isoscape = readIsoscape(readFileSync(at('again.json'), 'utf8'));
    expect(summary.isoscape_id).toBe(isoscape.id);
    expect(summary.stations).toEqual({ used: 30, left_out: 1, of_one_isotope: 1 });
    expect(summary.elevation_effect_permil_per_100m).toEqual(elevationEffect(isoscape));
    const { latitude_deg, ...effects } = summary.latitude_effect_permil_per_degree;
    expect(effects).toEqual(latitudeEffect(isoscape, latitude_deg));
    // exponential: e^(−h/a) = 0.05 at h = a·ln 20
    expect(summary.fields[0].range_5_percent_km).toBeCloseTo(summary.fields[0].range_km * Math.log(20), 6);
    expect(summary.leave_one_out).toHaveLength(12);
    expect(summary.trend_candidates).toEqual([]);
  });

  it('prints JSON alone where no file is named', async () => {
    const before = readdirSync(folder);
    const trial = await runCaptured(['fit', at('stations.csv'), '--json', ...QUICK]);
    expect(trial.exitCode).toBe(0);
    const kept = await runCaptured(['fit', at('stations.csv'), '--json', ...QUICK, '-o', at('kept.json')]);
    expect(JSON.parse(trial.stdout)).toEqual(JSON.parse(kept.stdout));
    expect(readdirSync(folder).filter((name) => !before.includes(name))).toEqual(['kept.json']);
  });

  it('holds fixed parameters and the turn', async () => {
    const fixes = ['along.range_km=400', 'along.sill=1', 'along.nugget=0.1', 'across.range_km=200', 'turn=5'];
    const held = await runCaptured([
      ...['fit', at('stations.csv'), '-o', at('held.json'), '--family', 'spherical', '--terms', 'elevation'],
      ...fixes.flatMap((fix) => ['--fix', fix]),
    ]);
    expect(held.exitCode).toBe(0);
    const isoscape = readIsoscape(readFileSync(at('held.json'), 'utf8'));
    if (isoscape.isotopes !== 'both') throw new Error('a fit of both isotopes was expected');
    expect(isoscape.along.parameters).toEqual({ rangeKm: 400, sill: 1, nugget: 0.1 });
    expect(isoscape.across.parameters.rangeKm).toBe(200);
    expect(isoscape.turnRad).toBeCloseTo((5 * Math.PI) / 180, 12);
    expect(held.stdout).toMatch(/turn 5\.0° fixed/);
    expect(held.stdout).toContain('range_km fixed');
    expect(held.stdout).toContain('Trend: elevation (fixed)');
  });

  it('fits one isotope alone', async () => {
    const single = await runCaptured([
      ...['fit', at('stations.csv'), '-o', at('single.json'), '--isotope', 'd18O'],
      ...['--family', 'exponential', '--terms', 'elevation'],
    ]);
    expect(single.exitCode).toBe(0);
    expect(single.stdout).toContain('Stations: 31 used');
    expect(single.stdout).not.toContain('d-excess');
    expect(single.stdout).not.toContain('Axes');
    expect(single.stdout).toMatch(/δ18O +[\d.]+ km/);
  });

  it('refuses fewer than ten usable stations and writes nothing', async () => {
    writeFileSync(at('few.csv'), inventNetwork({ stationCount: 9 }).csv);
    const few = await runCaptured(['fit', at('few.csv'), '-o', at('few.json')]);
    expect(few.exitCode).toBe(2);
    expect(few.stderr).toMatch(/^rainprint: STATIONS_TOO_FEW: .*9.*10/m);
    expect(existsSync(at('few.json'))).toBe(false);
  });

  it.each([
    [['--fix', 'along.range=1'], 'FIX_INVALID'],
    [['--family', 'gaussian'], 'OPTION_INVALID'],
    [['--terms', 'slope'], 'TERM_UNKNOWN'],
    [['--sampling-scale', '2'], 'OPTION_INVALID'],
    [['--isotope', 'd17O'], 'OPTION_INVALID'],
    [['--season', '13'], 'SEASON_INVALID'],
  ])('refuses %j before anything is written', async (options, code) => {
    const refused = await runCaptured(['fit', at('stations.csv'), '-o', at('refused.json'), ...options]);
    expect(refused.exitCode).toBe(2);
    expect(refused.stderr).toMatch(new RegExp(`^rainprint: ${code}: `, 'm'));
    expect(existsSync(at('refused.json'))).toBe(false);
  });

  it('never overwrites its input and needs an output', async () => {
    const over = await runCaptured(['fit', at('stations.csv'), '-o', at('stations.csv')]);
    expect(over).toMatchObject({ exitCode: 2, stderr: expect.stringContaining('OUTPUT_IS_INPUT') });
    const none = await runCaptured(['fit', at('stations.csv')]);
    expect(none).toMatchObject({ exitCode: 2, stderr: expect.stringContaining('OPTION_INVALID') });
  });

  it('shows an example with --help', async () => {
    const help = await runCaptured(['fit', '--help']);
    expect(help.exitCode).toBe(0);
    expect(help.stdout).toContain('rainprint fit stations.csv -o isoscape.json');
  });
});
