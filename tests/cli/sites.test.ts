import { createHash } from 'node:crypto';
import { existsSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import {
  createPlaces,
  createPredictions,
  type Isoscape,
  predictJoint,
  predictPlaces,
  readIsoscape,
} from '../../src/isoscape/index.js';
import { openElevation } from '../../src/raster/index.js';
import { runCaptured } from '../support/captured-run.js';
import { parseCsv } from '../support/csv.js';
import { fitInvented } from '../support/fitted-isoscape.js';
import { temporaryFolder } from '../support/temp-folder.js';

const folder = temporaryFolder();
const at = (name: string) => join(folder, name);
const sha256 = (text: string | Buffer) => createHash('sha256').update(text).digest('hex');

const ADDED = [
  ...['d18O', 'd18O_se', 'd18O_low', 'd18O_high', 'd2H', 'd2H_se', 'd2H_low', 'd2H_high'],
  ...['dexcess', 'dexcess_se', 'dexcess_low', 'dexcess_high', 'cov_d18O_d2H'],
  ...['elevation_m', 'elevation_source', 'nearest_station_km', 'support', 'problem'],
];

let isoscapePath: string;
let isoscape: Isoscape;
beforeAll(async () => {
  isoscapePath = (await fitInvented(folder, 'invented')).path;
  isoscape = readIsoscape(readFileSync(isoscapePath, 'utf8'));
});

function table(name: string, text: string): string {
  writeFileSync(at(name), text);
  return at(name);
}

const sites = (path: string, ...options: string[]) => runCaptured(['sites', isoscapePath, path, ...options]);

/** What the library says at one place. */
function predicted(lonDeg: number, latDeg: number, elevationM: number, options = {}, varianceM2 = 0) {
  const places = createPlaces(1);
  places.lonDeg[0] = lonDeg;
  places.latDeg[0] = latDeg;
  places.elevationM[0] = elevationM;
  places.elevationVarM2[0] = varianceM2;
  const out = createPredictions(1);
  predictPlaces(isoscape, places, out, options);
  return {
    d18O: out.d18O[0],
    d2H: out.d2H[0],
    seD18O: Math.sqrt(out.varD18O[0]),
    seD2H: Math.sqrt(out.varD2H[0]),
    cov: out.cov[0],
  };
}

const TWO_SITES =
  'plot,lon,lat,elevation,water\nA,-30.5,-46.25,120,lake\nB,-28,-44,900,"a ""quoted"", cell"\n';

describe('rainprint sites, CSV', () => {
  it('keeps the input columns and adds its own in the documented order', async () => {
    const run = await sites(table('two.csv', TWO_SITES));
    expect(run.exitCode).toBe(0);
    expect(run.stdout.split('\r\n')[0]).toBe(
      ['plot', 'lon', 'lat', 'elevation', 'water', ...ADDED].join(','),
    );
    const rows = parseCsv(run.stdout);
    expect(rows.map(({ plot, water }) => [plot, water])).toEqual([
      ['A', 'lake'],
      ['B', 'a "quoted", cell'],
    ]);
  });

  it('prints what the library predicts, with Gaussian intervals at the level asked', async () => {
    for (const [level, z] of [
      [0.9, 1.6448536269514722], // standard normal quantiles 0.95 and 0.75 (Abramowitz & Stegun, table 26.1)
      [0.5, 0.6744897501960817],
    ]) {
      const run = await sites(table('two.csv', TWO_SITES), '--level', String(level));
      const row = parseCsv(run.stdout)[0];
      const wanted = predicted(-30.5, -46.25, 120);
      expect(Number(row.d18O)).toBeCloseTo(wanted.d18O, 4);
      expect(Number(row.d2H_se)).toBeCloseTo(wanted.seD2H, 4);
      expect(Number(row.cov_d18O_d2H)).toBeCloseTo(wanted.cov, 5);
      expect(Number(row.d18O_low)).toBeCloseTo(wanted.d18O - z * wanted.seD18O, 3);
      expect(Number(row.d2H_high)).toBeCloseTo(wanted.d2H + z * wanted.seD2H, 3);
    }
  });

  it('prints a d-excess, and its error, coherent with the pair', async () => {
    for (const row of parseCsv((await sites(table('two.csv', TWO_SITES))).stdout)) {
      expect(Math.abs(Number(row.dexcess) - (Number(row.d2H) - 8 * Number(row.d18O)))).toBeLessThan(1e-9);
      const variance =
        Number(row.d2H_se) ** 2 + 64 * Number(row.d18O_se) ** 2 - 16 * Number(row.cov_d18O_d2H);
      expect(Number(row.dexcess_se)).toBeCloseTo(Math.sqrt(variance), 2);
      expect(row.dexcess).toMatch(/^-?\d+\.\d{4}$/);
    }
  });

  it('reads semicolons and decimal commas, and writes commas and points', async () => {
    const text = 'Plot;Länge;Breite;Elev\nA;-30,5;-46,25;120,0\nB;-28,1;-44,2;900,5\n';
    const run = await sites(table('comma.csv', text), '--column', 'lon=Länge', '--column', 'lat=Breite');
    expect(run.exitCode).toBe(0);
    const [row] = parseCsv(run.stdout);
    expect(Number(row.d18O)).toBeCloseTo(predicted(-30.5, -46.25, 120).d18O, 4);
    expect(row.Länge).toBe('-30,5');
    expect(row.elevation_m).toBe('120');
  });

  it('makes harmless what a spreadsheet would run, and only that', async () => {
    const text = 'id,lon,lat,elevation,note\n=1+1,-30,-46,0,-5.5\n@x,-30,-46,0,+cmd|x\n';
    const run = await sites(table('formula.csv', text));
    expect(parseCsv(run.stdout).map(({ id, note }) => [id, note])).toEqual([
      ["'=1+1", '-5.5'],
      ["'@x", "'+cmd|x"],
    ]);
  });

  it('keeps a column that has one of its names as input_<name>', async () => {
    const text = 'id,lon,lat,elevation_m,d18O,input_d18O\nA,-30,-46,0,-7.5,x\n';
    const run = await sites(table('clash.csv', text));
    expect(run.stdout.split('\r\n')[0]).toBe(
      ['id', 'lon', 'lat', 'input_elevation_m', 'input_d18O_2', 'input_d18O', ...ADDED].join(','),
    );
    const [row] = parseCsv(run.stdout);
    expect(row.input_d18O_2).toBe('-7.5');
    expect(row.elevation_m).toBe('0');
  });

  it('takes elevation 0 and longitude 0 for data', async () => {
    const [row] = parseCsv((await sites(table('zero.csv', 'lon,lat,elevation\n0,0,0\n'))).stdout);
    expect(row).toMatchObject({ elevation_m: '0', elevation_source: 'table', problem: '' });
    expect(Number(row.d18O)).toBeCloseTo(predicted(0, 0, 0).d18O, 4);
  });

  it('writes the same however the rows are batched', async () => {
    const rows = Array.from({ length: 2500 }, (_, i) => `S${i},${-34 + i / 400},${-50 + i / 400},${i % 900}`);
    const run = await sites(table('many.csv', `id,lon,lat,elevation\n${rows.join('\n')}\n`));
    const out = parseCsv(run.stdout);
    expect(out).toHaveLength(2500);
    for (const i of [0, 1023, 1024, 2499]) {
      expect(out[i].id).toBe(`S${i}`);
      expect(Number(out[i].d2H)).toBeCloseTo(predicted(-34 + i / 400, -50 + i / 400, i % 900).d2H, 4);
    }
  });

  it('gives the target field a smaller error than a site, by the nugget, and plug-in another', async () => {
    const path = table('two.csv', TWO_SITES);
    const [site] = parseCsv((await sites(path)).stdout);
    const [field] = parseCsv((await sites(path, '--target', 'field')).stdout);
    const [plugIn] = parseCsv((await sites(path, '--plug-in')).stdout);
    const wantedField = predicted(-30.5, -46.25, 120, { target: 'field' });
    const wantedPlugIn = predicted(-30.5, -46.25, 120, { plugIn: true });
    expect(Number(field.d18O_se)).toBeCloseTo(wantedField.seD18O, 4);
    expect(Number(field.d18O_se)).toBeLessThanOrEqual(Number(site.d18O_se));
    expect(Number(plugIn.d2H_se)).toBeCloseTo(wantedPlugIn.seD2H, 4);
    expect(plugIn.d2H_se).not.toBe(site.d2H_se);
  });

  it('sets support flags and says how many sites carry them', async () => {
    const text = 'lon,lat,elevation\n-30,-46,100\n100,20,4000\n';
    const run = await sites(table('far.csv', text));
    expect(run.exitCode).toBe(0);
    const rows = parseCsv(run.stdout);
    expect(rows[0].support).toBe('');
    expect(rows[1].support).toBe(
      'outside-hull;far-from-stations;elevation-beyond-stations;latitude-beyond-stations',
    );
    expect(Number(rows[1].nearest_station_km)).toBeGreaterThan(5000);
    expect(run.stderr).toContain('1 of 2 sites lean on little');
  });
});

describe('bad rows', () => {
  const text =
    'id,lon,lat,elevation\nok,-30,-46,10\nbad,x,-46,10\nnorth,10,120,10\nhigh,-30,-46,99999\nragged,1\n';

  it('get their reason and do not sink the others', async () => {
    const run = await sites(table('bad.csv', text));
    expect(run.exitCode).toBe(2);
    expect(run.stderr).toMatch(/^rainprint: SITES_WITH_PROBLEMS: 4 of 5 rows/m);
    expect(run.stderr).toContain('line 3: not-a-number: column lon: found "x", expected a number');
    const rows = parseCsv(run.stdout);
    expect(rows.map(({ id }) => id)).toEqual(['ok', 'bad', 'north', 'high', 'ragged']);
    expect(rows[0].problem).toBe('');
    expect(rows[0].d18O).not.toBe('');
    const reasons = rows.slice(1).map(({ problem }) => problem.split(':')[0]);
    expect(reasons).toEqual([
      'not-a-number',
      'coordinates-out-of-range',
      'elevation-implausible',
      'row-ragged',
    ]);
    for (const row of rows.slice(1)) {
      for (const name of ADDED.slice(0, -1)) expect(row[name]).toBe('');
    }
  });

  it('exit 0 where they may be skipped', async () => {
    const run = await sites(table('bad.csv', text), '--skip-bad');
    expect(run.exitCode).toBe(0);
    expect(run.stderr).toContain('note: 4 of 5 rows');
    expect(parseCsv(run.stdout)).toHaveLength(5);
  });
});

describe('elevation', () => {
  // The bundled grid, in the middle of two continents (places picked for being land, nothing else).
  const INLAND = 'id,lon,lat\nE,134,-25\nA,-66.5,-30.2\n';

  it('comes from the bundled grid where the table has none, with its uncertainty', async () => {
    const run = await sites(table('inland.csv', INLAND));
    expect(run.exitCode).toBe(0);
    const grid = await openElevation('grids/elevation-5min.tif');
    for (const [i, [lonDeg, latDeg]] of [
      [134, -25],
      [-66.5, -30.2],
    ].entries()) {
      const found = await grid.sample(lonDeg, latDeg);
      if (found.kind !== 'land') throw new Error('land was expected');
      expect(found.varianceM2).toBeGreaterThan(0);
      const row = parseCsv(run.stdout)[i];
      expect(Number(row.elevation_m)).toBeCloseTo(found.elevationM, 2);
      expect(row.elevation_source).toBe(grid.source);
      expect(row.support.split(';')).toContain('elevation-from-grid');
      const wanted = predicted(lonDeg, latDeg, found.elevationM, {}, found.varianceM2);
      expect(Number(row.d18O_se)).toBeCloseTo(wanted.seD18O, 4);
    }
    await grid.close();
  });

  it('of an earlier output is looked up again, not taken for a measurement', async () => {
    await sites(table('inland.csv', INLAND), '-o', at('first.csv'));
    const again = await sites(at('first.csv'));
    expect(again.exitCode).toBe(0);
    const [row] = parseCsv(again.stdout);
    expect(row.support.split(';')).toContain('elevation-from-grid');
    expect(row.input_d18O).toBe(row.d18O);
  });

  it('is a problem at sea', async () => {
    const run = await sites(table('sea.csv', 'lon,lat\n-30,-46\n'));
    expect(run.exitCode).toBe(2);
    expect(parseCsv(run.stdout)[0].problem).toMatch(/^elevation-missing: .*no land at -30, -46/);
  });

  it('is not asked for by an isoscape without an elevation term', async () => {
    const { path } = await fitInvented(folder, 'flat', {}, ['--terms', 'zonal1']);
    const run = await runCaptured(['sites', path, table('sea.csv', 'lon,lat\n-30,-46\n')]);
    expect(run.exitCode).toBe(0);
    expect(parseCsv(run.stdout)[0]).toMatchObject({ elevation_m: '', elevation_source: '', support: '' });
  });

  it('grid named by the user must exist', async () => {
    const run = await sites(table('sea.csv', 'lon,lat\n-30,-46\n'), '--elevation', at('none.tif'));
    expect(run.exitCode).toBe(2);
    expect(run.stderr).toMatch(/^rainprint: FILE_NOT_FOUND: /m);
  });
});

describe('one isotope', () => {
  it('adds the columns of that isotope only', async () => {
    const { path } = await fitInvented(folder, 'd2H', {}, ['--isotope', 'd2H']);
    const run = await runCaptured(['sites', path, table('two.csv', TWO_SITES)]);
    expect(run.stdout.split('\r\n')[0]).toBe(
      `plot,lon,lat,elevation,water,d2H,d2H_se,d2H_low,d2H_high,${ADDED.slice(13).join(',')}`,
    );
    const row = parseCsv(run.stdout)[0];
    expect(Number(row.d2H_low)).toBeLessThan(Number(row.d2H));
    expect(Object.values(row)).not.toContain('NaN');
  });
});

describe('GeoJSON', () => {
  const points = {
    type: 'FeatureCollection',
    features: [
      {
        type: 'Feature',
        id: 7,
        geometry: { type: 'Point', coordinates: [-30.5, -46.25, 120] },
        properties: { plot: 'A', count: 3, code: '007', dry: true, nested: { a: [1] }, none: null },
      },
      { type: 'Feature', geometry: null, properties: { plot: 'nowhere' } },
    ],
  };

  it('goes in and out with its own property types, numbers as numbers', async () => {
    const run = await sites(table('points.geojson', JSON.stringify(points)), '--format', 'geojson');
    expect(run.exitCode).toBe(2); // the feature without a place
    const out = JSON.parse(run.stdout);
    expect(out.type).toBe('FeatureCollection');
    const [first, second] = out.features;
    expect(first.geometry).toEqual({ type: 'Point', coordinates: [-30.5, -46.25] });
    expect(first.properties).toMatchObject({ ...points.features[0].properties, elevation_source: 'table' });
    expect(first.properties.d18O).toBeCloseTo(predicted(-30.5, -46.25, 120).d18O, 4);
    expect(first.properties.dexcess).toBe(
      Number((first.properties.d2H - 8 * first.properties.d18O).toFixed(4)),
    );
    expect(Object.keys(first.properties).slice(-ADDED.length)).toEqual(ADDED);
    expect(second.geometry).toBeNull();
    expect(second.properties).toMatchObject({ plot: 'nowhere', d18O: null });
    expect(second.properties.problem).toMatch(/^geometry-not-point: /);
  });

  it('comes from a CSV with numbers typed and ids kept as text', async () => {
    const text = 'id;lon;lat;elevation;a;b\n12;-30,5;-46,25;120;007;1,5\n';
    const run = await sites(table('typed.csv', text), '--format', 'geojson');
    const [feature] = JSON.parse(run.stdout).features;
    expect(feature.properties).toMatchObject({ id: '12', lon: -30.5, elevation: 120, a: '007', b: 1.5 });
  });

  it('goes in and out as CSV', async () => {
    const one = { ...points, features: points.features.slice(0, 1) };
    const run = await sites(table('one.geojson', JSON.stringify(one)));
    expect(run.exitCode).toBe(0);
    const [row] = parseCsv(run.stdout);
    expect(row).toMatchObject({ plot: 'A', code: '007', elevation_m: '120', longitude: '-30.5' });
  });
});

describe('what stands beside the output', () => {
  it('is a record that would run it again, without a clock in it', async () => {
    const input = table('two.csv', TWO_SITES);
    await sites(input, '-o', at('out.csv'), '--target', 'field', '--level', '0.8');
    const first = readFileSync(at('out.csv.run.json'), 'utf8');
    const record = JSON.parse(first);
    expect(record.isoscape.id).toBe(isoscape.id);
    expect(record.options).toMatchObject({ target: 'field', level: 0.8, plug_in: false, format: 'csv' });
    expect(record.elevation.grid).toBeNull();
    expect(record.input).toMatchObject({ file: 'two.csv', sha256: sha256(TWO_SITES), sites: 2, problems: 0 });
    expect(record.output.sha256).toBe(sha256(readFileSync(at('out.csv'))));
    await sites(input, '-o', at('out.csv'), '--target', 'field', '--level', '0.8');
    expect(readFileSync(at('out.csv.run.json'), 'utf8')).toBe(first);
  });

  it('is nothing with standard output, unless a record is asked for', async () => {
    const before = readdirSync(folder);
    await sites(at('two.csv'));
    expect(readdirSync(folder)).toEqual(before);
    const run = await sites(at('two.csv'), '--record', at('record.json'));
    expect(JSON.parse(readFileSync(at('record.json'), 'utf8')).output).toEqual({
      file: null,
      sha256: sha256(run.stdout),
    });
  });

  it('explains each site: parts that add up, ten stations, weights that sum to at most 1 there', async () => {
    await sites(table('two.csv', TWO_SITES), '-o', at('explained.csv'), '--explain');
    const explained = JSON.parse(readFileSync(at('explained.csv.explain.json'), 'utf8'));
    expect(explained.isoscape).toBe(isoscape.id);
    expect(explained.sites.map(({ site }: { site: string }) => site)).toEqual(['A', 'B']);
    const [site] = explained.sites;
    const plugIn = predicted(-30.5, -46.25, 120, { plugIn: true });
    expect(site.parts.d18O.trend + site.parts.d18O.residual).toBeCloseTo(plugIn.d18O, 4);
    expect(site.parts.dexcess.trend).toBeCloseTo(site.parts.d2H.trend - 8 * site.parts.d18O.trend, 4);
    expect(site.stations).toHaveLength(10);
    expect(Object.keys(site.stations[0].weight)).toEqual(['along', 'across']);
    const nearest = Math.min(...site.stations.map((s: { distance_km: number }) => s.distance_km));
    expect(nearest).toBeLessThan(300);
  });

  it('explains on stderr where there is no output file', async () => {
    const run = await sites(table('two.csv', TWO_SITES), '--explain');
    expect(run.stderr).toMatch(/A \(-30\.5, -46\.25, 120 m\)\n.*trend +residual/);
    expect(run.stderr).toContain('weight across');
    expect(parseCsv(run.stdout)).toHaveLength(2);
  });

  it('holds the joint covariance of the sites that have a value', async () => {
    const text = 'id,lon,lat,elevation\nA,-30.5,-46.25,120\nbad,x,0,0\nB,-28,-44,900\n';
    const run = await sites(table('joint.csv', text), '--joint', at('joint.json'), '--skip-bad');
    expect(run.exitCode).toBe(0);
    const joint = JSON.parse(readFileSync(at('joint.json'), 'utf8'));
    expect(joint.variables).toEqual([
      { site: 'A', isotope: 'd18O' },
      { site: 'A', isotope: 'd2H' },
      { site: 'B', isotope: 'd18O' },
      { site: 'B', isotope: 'd2H' },
    ]);
    const places = createPlaces(2);
    places.lonDeg.set([-30.5, -28]);
    places.latDeg.set([-46.25, -44]);
    places.elevationM.set([120, 900]);
    const wanted = predictJoint(isoscape, places);
    const flat = joint.covariance.flat();
    expect(flat).toHaveLength(16);
    flat.forEach((value: number, i: number) => {
      expect(value).toBeCloseTo(wanted.covariance[i], 8);
    });
    const [row] = parseCsv(run.stdout);
    expect(Math.sqrt(joint.covariance[0][0])).toBeCloseTo(Number(row.d18O_se), 4);
    expect(joint.covariance[0][1]).toBeCloseTo(Number(row.cov_d18O_d2H), 5);
  });

  it('refuses a joint covariance of too many sites before anything is written', async () => {
    const rows = Array.from({ length: 1001 }, () => '-30,-46,0').join('\n');
    const input = table('toomany.csv', `lon,lat,elevation\n${rows}\n`);
    const run = await sites(input, '--joint', at('big.json'));
    expect(run).toMatchObject({ exitCode: 2, stdout: '' });
    expect(run.stderr).toMatch(/^rainprint: JOINT_TOO_MANY_SITES: /m);
    expect(existsSync(at('big.json'))).toBe(false);
  });
});

describe('the call', () => {
  it.each([
    [['--level', '90'], 'OPTION_INVALID'],
    [['--level', '1'], 'OPTION_INVALID'],
    [['--level', ''], 'OPTION_INVALID'],
    [['--target', 'town'], 'OPTION_INVALID'],
    [['--format', 'xlsx'], 'OPTION_INVALID'],
    [['--column', 'lat'], 'OPTION_INVALID'],
    [['--column', 'd18O=lat'], 'COLUMN_MEANING_UNKNOWN'],
    [['--column', 'lat=nowhere'], 'COLUMN_NOT_FOUND'],
  ])('refuses %j', async (options, code) => {
    const run = await sites(table('two.csv', TWO_SITES), ...options);
    expect(run.exitCode).toBe(2);
    expect(run.stdout).toBe('');
    expect(run.stderr).toMatch(new RegExp(`^rainprint: ${code}: `, 'm'));
  });

  it('never overwrites an input, nor one output with another', async () => {
    const input = table('two.csv', TWO_SITES);
    for (const options of [
      ['-o', input],
      ['-o', isoscapePath],
      ['-o', at('o.csv'), '--joint', input],
    ]) {
      const run = await sites(input, ...options);
      expect(run).toMatchObject({ exitCode: 2, stderr: expect.stringContaining('OUTPUT_IS_INPUT') });
    }
    const twice = await sites(input, '-o', at('o.csv'), '--joint', at('o.csv'));
    expect(twice).toMatchObject({ exitCode: 2, stderr: expect.stringContaining('OPTION_INVALID') });
    expect(existsSync(at('o.csv'))).toBe(false);
    expect(readFileSync(input, 'utf8')).toBe(TWO_SITES);
  });

  it('shows an example with --help', async () => {
    const help = await runCaptured(['sites', '--help']);
    expect(help.exitCode).toBe(0);
    expect(help.stdout).toContain('rainprint sites isoscape.json plots.csv -o plots-rain.csv');
  });
});
