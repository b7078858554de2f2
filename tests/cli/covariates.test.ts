// Covariate grids through the command line: fit, sites, validate.
import { copyFileSync, existsSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { createPlaces, createPredictions, predictPlaces, readIsoscape } from '../../src/isoscape/index.js';
import { openCovariate } from '../../src/raster/index.js';
import { runCaptured } from '../support/captured-run.js';
import { COVARIATE_EFFECT, csvWithEffect, writeCovariate } from '../support/covariate-raster.js';
import { parseCsv } from '../support/csv.js';
import { temporaryFolder } from '../support/temp-folder.js';

const folder = temporaryFolder();
const at = (name: string) => join(folder, name);
const STATIONS = 40;
const HUMIDITY = `humidity=${at('humidity.tif')}`;
/** No value in the south-west, and none north of −42.5. */
const GAPPY = `humidity=${at('gappy.tif')}`;

function table(name: string, text: string): string {
  writeFileSync(at(name), text);
  return at(name);
}

const fitted = (...options: string[]) =>
  runCaptured([
    'fit',
    at('stations.csv'),
    '--family',
    'exponential',
    '--terms',
    'zonal1,elevation',
    ...options,
  ]);
const sites = (path: string, ...options: string[]) =>
  runCaptured(['sites', at('rain.json'), path, ...options]);

beforeAll(async () => {
  await writeCovariate(at('humidity.tif'));
  await writeCovariate(at('gappy.tif'), { empty: (lon, lat) => (lon < -31 && lat < -47) || lat > -42.5 });
  await writeCovariate(at('constant.tif'), { constant: 3 });
  writeFileSync(at('stations.csv'), await csvWithEffect(at('humidity.tif'), STATIONS));
  const run = await fitted('-o', at('rain.json'), '--covariate', HUMIDITY);
  if (run.exitCode !== 0) throw new Error(run.stderr);
});

describe('rainprint fit --covariate', () => {
  it('puts the covariate into the trend and prints its effect, found within three SE', async () => {
    const run = await fitted('-o', at('again.json'), '--covariate', HUMIDITY, '--json');
    expect(run).toMatchObject({ exitCode: 0, stderr: '' });
    const json = JSON.parse(run.stdout);
    expect(json.terms).toEqual(['zonal1', 'elevation', 'humidity']);
    const [covariate] = json.covariates;
    expect(covariate.name).toBe('humidity');
    expect(covariate.source).toMatch(/^humidity\.tif sha256:[0-9a-f]{12}$/);
    for (const isotope of ['d18O', 'd2H'] as const) {
      const { value, se } = covariate.effect_permil_per_unit[isotope];
      expect(Math.abs(value - COVARIATE_EFFECT[isotope])).toBeLessThan(3 * se);
      expect(Math.abs(value)).toBeGreaterThan(3 * se);
    }
    const report = (await fitted('-o', at('again.json'), '--covariate', HUMIDITY)).stdout;
    const { value, se } = covariate.effect_permil_per_unit.d18O;
    const line = report.split('\n').find((text) => text.startsWith('humidity, ‰ per unit'))!;
    const [printed, printedSe] = [...line.matchAll(/(-?[\d.]+) ± ([\d.]+)/g)][0]!.slice(1).map(Number);
    expect(printed).toBeCloseTo(value, 4);
    expect(printedSe).toBeCloseTo(se, 4);
    expect(readFileSync(at('again.json'), 'utf8')).toBe(readFileSync(at('rain.json'), 'utf8'));
  });

  it('says nothing of covariates where there are none', async () => {
    const run = await fitted('--json');
    expect(JSON.parse(run.stdout)).not.toHaveProperty('covariates');
    expect((await fitted('-o', at('plain.json'))).stdout).not.toMatch(/per unit/);
  });

  it('samples the raster where the stations are', async () => {
    const { stations } = readIsoscape(readFileSync(at('rain.json'), 'utf8'));
    const grid = await openCovariate(at('humidity.tif'));
    for (const [i, value] of stations.covariates[0]!.entries()) {
      expect(await grid.sample(stations.lonDeg[i]!, stations.latDeg[i]!)).toEqual({ kind: 'value', value });
    }
    await grid.close();
  });

  it('leaves out stations on nodata and outside, names them with the reason, and counts them', async () => {
    const rows = readFileSync(at('stations.csv'), 'utf8').trim().split('\n');
    const far = 'FAR,-24.9,-45,10,-7,-50,48,2,15';
    writeFileSync(at('wide.csv'), `${[...rows, far].join('\n')}\n`);
    const run = await runCaptured([
      'fit',
      at('wide.csv'),
      '--family',
      'exponential',
      '--terms',
      'none',
      '--json',
      '--covariate',
      GAPPY,
    ]);
    expect(run.exitCode).toBe(0);
    const grid = await openCovariate(at('gappy.tif'));
    const lacking: string[] = [];
    for (const row of parseCsv(readFileSync(at('wide.csv'), 'utf8'))) {
      const { kind } = await grid.sample(Number(row.lon), Number(row.lat));
      if (kind === 'nodata') lacking.push(row.id!);
    }
    await grid.close();
    expect(lacking.length).toBeGreaterThan(3);
    const [note] = run.stderr.split('\n').filter((text) => text.includes('want of a covariate'));
    expect(note).toContain(`${lacking.length + 1}; `);
    expect(note).toMatch(/humidity, outside gappy\.tif sha256:[0-9a-f]{12}: FAR \(line 42\)/);
    expect(note).toMatch(/humidity, on a cell without a value of gappy\.tif/);
    for (const id of lacking) expect(note).toMatch(new RegExp(`${id} \\(line \\d+\\)`));
    const { stations } = JSON.parse(run.stdout);
    expect(stations).toMatchObject({
      left_out: lacking.length + 1,
      used: STATIONS - lacking.length,
    });
  });

  it('ends where too few stations remain, having said which it left out', async () => {
    await writeCovariate(at('tiny.tif'), { empty: (lon, lat) => lon < -28 || lat < -47 });
    const run = await fitted('-o', at('none.json'), '--covariate', `humidity=${at('tiny.tif')}`);
    expect(run.exitCode).toBe(2);
    expect(run.stderr).toMatch(/stations left out for want of a covariate/);
    expect(run.stderr).toMatch(/STATIONS_TOO_FEW/);
    expect(existsSync(at('none.json'))).toBe(false);
  });

  it.each<[string, RegExp, string[]]>([
    ['no name', /OPTION_INVALID: --covariate .*NAME=FILE/, ['--covariate', 'humidity.tif']],
    ['no file', /OPTION_INVALID/, ['--covariate', 'humidity=']],
    ['a wrong name', /COVARIATE_NAME_INVALID.*"Humidity"/, ['--covariate', 'Humidity=x.tif']],
    ['the name of a term', /COVARIATE_NAME_INVALID.*"elevation"/, ['--covariate', 'elevation=x.tif']],
    ['one name twice', /COVARIATE_TWICE/, ['--covariate', HUMIDITY, '--covariate', GAPPY]],
    ['a file that is not there', /FILE_NOT_FOUND.*none\.tif/, ['--covariate', 'humidity=none.tif']],
    ['a file that is no raster', /RASTER_NOT_TIFF/, ['--covariate', `humidity=${at('stations.csv')}`]],
    [
      'a constant raster',
      /COVARIATE_CONSTANT.*"humidity".*\(3\)/,
      ['--covariate', `humidity=${at('constant.tif')}`],
    ],
    [
      'one raster under two names',
      /COVARIATE_COLLINEAR.*wet/,
      ['--covariate', HUMIDITY, '--covariate', `wet=${at('humidity.tif')}`],
    ],
    [
      'a term nobody named',
      /TERM_UNKNOWN: trend term "wet".*humidity/,
      ['--covariate', HUMIDITY, '--terms', 'wet'],
    ],
  ])('refuses %s', async (_, message, options) => {
    const run = await fitted('-o', at('none.json'), ...options);
    expect(run.exitCode).toBe(2);
    expect(run.stderr).toMatch(message);
    expect(run.stderr.trim().split('\n')).toHaveLength(1);
    expect(existsSync(at('none.json'))).toBe(false);
  });

  it('takes the covariate among the terms, and does not write over its raster', async () => {
    const named = await fitted(
      '-o',
      at('named.json'),
      '--covariate',
      HUMIDITY,
      '--terms',
      'humidity,zonal1,elevation',
    );
    expect(named.exitCode).toBe(0);
    expect(readFileSync(at('named.json'), 'utf8')).toBe(readFileSync(at('rain.json'), 'utf8'));
    copyFileSync(at('humidity.tif'), at('kept.tif'));
    const over = await fitted('-o', at('kept.tif'), '--covariate', `humidity=${at('kept.tif')}`);
    expect(over).toMatchObject({ exitCode: 2, stderr: expect.stringContaining('OUTPUT_IS_INPUT') });
    expect(readFileSync(at('kept.tif'))).toEqual(readFileSync(at('humidity.tif')));
  });
});

/** What the library says at one place. */
function predicted(lonDeg: number, latDeg: number, elevationM: number, humidity: number): number {
  const places = createPlaces(1, 1);
  places.lonDeg[0] = lonDeg;
  places.latDeg[0] = latDeg;
  places.elevationM[0] = elevationM;
  places.covariates[0]![0] = humidity;
  const out = createPredictions(1);
  predictPlaces(readIsoscape(readFileSync(at('rain.json'), 'utf8')), places, out);
  return out.d2H[0]!;
}

async function sampled(lonDeg: number, latDeg: number): Promise<number> {
  const grid = await openCovariate(at('humidity.tif'));
  const found = await grid.sample(lonDeg, latDeg);
  await grid.close();
  if (found.kind !== 'value') throw new Error(found.kind);
  return found.value;
}

const PLAIN = 'plot,lon,lat,elevation\nA,-30.5,-46.25,120\nB,-28,-44,900\n';

describe('rainprint sites --covariate', () => {
  it('samples the raster and says the value used and its source', async () => {
    const run = await sites(table('plain.csv', PLAIN), '--covariate', HUMIDITY);
    expect(run).toMatchObject({ exitCode: 0, stderr: '' });
    expect(run.stdout.split('\r\n')[0]).toMatch(
      /elevation_source,covariate_humidity,covariate_humidity_source,nearest_station_km/,
    );
    for (const [row, lon, lat, elevation] of [
      [parseCsv(run.stdout)[0]!, -30.5, -46.25, 120],
      [parseCsv(run.stdout)[1]!, -28, -44, 900],
    ] as const) {
      const value = await sampled(lon, lat);
      expect(Number(row.covariate_humidity)).toBeCloseTo(value, 6);
      expect(row.covariate_humidity_source).toMatch(/^humidity\.tif sha256:/);
      expect(Number(row.d2H)).toBeCloseTo(predicted(lon, lat, elevation, value), 3);
    }
  });

  it("prefers the table's own value, row by row, and needs no raster where all rows have one", async () => {
    const own = table(
      'own.csv',
      'plot,lon,lat,elevation,Humidity (%)\nA,-30.5,-46.25,120,77.5\nB,-28,-44,900,\n',
    );
    const [a, b] = parseCsv((await sites(own, '--covariate', HUMIDITY)).stdout);
    expect(a).toMatchObject({
      covariate_humidity: '77.5',
      covariate_humidity_source: 'table',
      'Humidity (%)': '77.5',
    });
    expect(Number(a!.d2H)).toBeCloseTo(predicted(-30.5, -46.25, 120, 77.5), 3);
    expect(b!.covariate_humidity_source).toMatch(/^humidity\.tif/);
    const without = await sites(own);
    expect(without.exitCode).toBe(2);
    const rows = parseCsv(without.stdout);
    expect(rows[0]!.d2H).toBe(a!.d2H);
    expect(rows[1]!.problem).toMatch(/^covariate-missing: the row has no value of humidity and no raster/);
    expect(rows[1]).toMatchObject({ d2H: '', covariate_humidity: '', covariate_humidity_source: '' });
  });

  it('reads own values with decimal commas, and under a header named by --column', async () => {
    const path = table('commas.csv', 'plot;lon;lat;elevation;rF\nA;-30,5;-46,25;120;77,5\n');
    const run = await sites(path, '--column', 'humidity=rF');
    expect(run.exitCode).toBe(0);
    expect(parseCsv(run.stdout)[0]).toMatchObject({ covariate_humidity: '77.5', rF: '77,5' });
  });

  it('has a problem, and no value, where the raster has none', async () => {
    const path = table('gaps.csv', 'plot,lon,lat,elevation\nA,-33,-49,10\nB,-20,-45,10\nC,-28,-44,900\n');
    const run = await sites(path, '--covariate', GAPPY);
    expect(run.exitCode).toBe(2);
    const [a, b, c] = parseCsv(run.stdout);
    expect(a!.problem).toMatch(/^covariate-missing: gappy\.tif sha256:\w+ has no value at -33, -49/);
    expect(b!.problem).toMatch(/^covariate-missing: gappy\.tif sha256:\w+ does not reach the place -20, -45/);
    expect([a!.d18O, b!.d18O]).toEqual(['', '']);
    expect(c!.problem).toBe('');
    expect(run.stderr).toMatch(/2 of 3 rows have no prediction/);
  });

  it('notes a raster that is not the one of the fit; a copy under another name is', async () => {
    const path = table('plain.csv', PLAIN);
    const other = await sites(path, '--covariate', GAPPY);
    expect(other.exitCode).toBe(0);
    expect(other.stderr).toMatch(
      /note: covariate humidity comes from gappy\.tif sha256:\w{12}; the isoscape was fitted with humidity\.tif sha256:\w{12}\n/,
    );
    copyFileSync(at('humidity.tif'), at('copy.tif'));
    expect((await sites(path, '--covariate', `humidity=${at('copy.tif')}`)).stderr).toBe('');
  });

  it('flags values beyond those of the stations', async () => {
    const path = table(
      'beyond.csv',
      'plot,lon,lat,elevation,humidity\nA,-30.5,-46.25,120,400\nB,-30.5,-46.25,120,50\n',
    );
    const run = await sites(path);
    const [a, b] = parseCsv(run.stdout);
    expect(a!.support).toContain('covariate-beyond-stations');
    expect(b!.support).not.toContain('covariate-beyond-stations');
    expect(run.stderr).toMatch(/covariate-beyond-stations 1/);
  });

  it('refuses a call without the raster, and a covariate the isoscape has not', async () => {
    const path = table('plain.csv', PLAIN);
    const missing = await sites(path, '-o', at('out.csv'));
    expect(missing.exitCode).toBe(2);
    expect(missing.stderr).toMatch(
      /^rainprint: COVARIATE_MISSING: .*"humidity" \(fitted from humidity\.tif sha256:\w+\).*--covariate humidity=FILE\.tif\n$/,
    );
    expect(existsSync(at('out.csv'))).toBe(false);
    const unknown = await sites(path, '--covariate', HUMIDITY, '--covariate', `wet=${at('gappy.tif')}`);
    expect(unknown.stderr).toMatch(/^rainprint: COVARIATE_UNKNOWN: .*"wet".*it has humidity/);
    await fitted('-o', at('plain.json'));
    const none = await runCaptured(['sites', at('plain.json'), path, '--covariate', HUMIDITY]);
    expect(none.stderr).toMatch(/COVARIATE_UNKNOWN.*it has none/);
  });

  it('writes values and sources into the record, the joint file and the explanations', async () => {
    const path = table('plain.csv', PLAIN);
    const [joint, explain] = [at('joint.json'), at('explain.json')];
    const run = await sites(
      path,
      '--covariate',
      HUMIDITY,
      '-o',
      at('out.csv'),
      '--joint',
      joint,
      `--explain=${explain}`,
    );
    expect(run.exitCode).toBe(0);
    const read = (file: string) => JSON.parse(readFileSync(file, 'utf8'));
    const value = await sampled(-30.5, -46.25);
    expect(read(at('out.csv.run.json')).covariates).toMatchObject({
      table_first: true,
      rasters: [{ name: 'humidity', source: expect.stringMatching(/^humidity\.tif sha256:/) }],
    });
    expect(read(joint).sites[0].covariates.humidity).toBeCloseTo(value, 6);
    const [site] = read(explain).sites;
    expect(site.covariates.humidity).toBeCloseTo(value, 6);
    const { trend, residual } = site.parts.d2H;
    expect(trend + residual).toBeCloseTo(read(joint).mean[1], 0);
    const over = await sites(path, '--covariate', `humidity=${at('copy.tif')}`, '-o', at('copy.tif'));
    expect(over.stderr).toMatch(/OUTPUT_IS_INPUT/);
  });

  it('takes its own output as input: earlier covariate columns are kept and not read', async () => {
    const first = await sites(table('plain.csv', PLAIN), '--covariate', HUMIDITY);
    const again = await sites(table('first.csv', first.stdout), '--covariate', HUMIDITY);
    expect(again.exitCode).toBe(0);
    const [row] = parseCsv(again.stdout);
    expect(row!.input_covariate_humidity).toBe(row!.covariate_humidity);
    expect(row!.covariate_humidity_source).toMatch(/^humidity\.tif/);
  });

  it('writes GeoJSON with the value as a number', async () => {
    const run = await sites(table('plain.csv', PLAIN), '--covariate', HUMIDITY, '--format', 'geojson');
    const [feature] = JSON.parse(run.stdout).features;
    expect(feature.properties.covariate_humidity).toBeCloseTo(await sampled(-30.5, -46.25), 6);
  });
});

describe('rainprint validate', () => {
  it('scores an isoscape with covariates from its file alone', async () => {
    const run = await runCaptured(['validate', at('rain.json'), '--folds', '3', '--json']);
    expect(run.exitCode).toBe(0);
    const { leave_one_out, blocked } = JSON.parse(run.stdout);
    const rmse = (scheme: typeof blocked, method: string) =>
      scheme.scores.find(
        (s: { variable: string; method: string }) => s.variable === 'd2H' && s.method === method,
      ).rmse_permil;
    expect(blocked.folds.every((fold: { failure: unknown }) => fold.failure === null)).toBe(true);
    // Without the covariate, whose effect spans 25 ‰, the nearest station is all there is to go by.
    expect(rmse(leave_one_out, 'isoscape')).toBeLessThan(0.5 * rmse(leave_one_out, 'nearest'));
    expect(rmse(blocked, 'isoscape')).toBeLessThan(0.5 * rmse(blocked, 'nearest'));
  });
});
