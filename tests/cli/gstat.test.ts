// The same universal kriging as gstat's (tests/reference/gstat.json; source there), but through the command line:
// `fit --isotope d18O` with everything fixed, `sites --plug-in`. The Colorado spring temperatures stand in for δ18O,
// lowered by 30 so that they lie where rain does: with an intercept in the trend only the means are shifted by it.
import { execFileSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { parse } from 'csv-parse/sync';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { createPredictions, predictPlaces, readIsoscape } from '../../src/isoscape/index.js';
import { toPlaces } from '../isoscape/dense-reference.js';
import { largestDifference, readColorado, readGstat, standardDeviation } from '../reference/read.js';

const SHIFT = -30;
const colorado = readColorado();
const { stations, places } = colorado;
const folder = mkdtempSync(join(tmpdir(), 'rainprint-gstat-'));
const file = (name: string) => join(folder, name);
const rainprint = (...args: string[]) =>
  execFileSync(process.execPath, ['scripts/rainprint.mjs', ...args], { encoding: 'utf8', stdio: 'pipe' });

beforeAll(() => {
  // The standard deviation of a record is the same everywhere, so that SD²/n is the known error variance.
  const sd = Math.sqrt(colorado.pooledVariance);
  const rows = stations.id.map((id, i) =>
    [
      id,
      stations.lonDeg[i],
      stations.latDeg[i],
      stations.elevationM[i],
      stations.value[i]! + SHIFT,
      sd,
      stations.years[i],
    ].join(','),
  );
  writeFileSync(file('stations.csv'), `id,lon,lat,elevation_m,d18O,d18O_sd,n\n${rows.join('\n')}\n`);
  const sites = places.lonDeg.map((lon, i) => `P${i},${lon},${places.latDeg[i]},${places.elevationM[i]}`);
  writeFileSync(file('sites.csv'), `id,lon,lat,elevation_m\n${sites.join('\n')}\n`);
});
afterAll(() => rmSync(folder, { recursive: true }));

// With a nugget, with none, and in another family.
const models = readGstat().colorado.filter(
  (model) => model.knownErrors && model.name !== 'colorado-matern32',
);

describe('gstat through the command line', () => {
  it.each(models)('$name', (model) => {
    const fix = { range_km: model.rangeKm, sill: model.sill, nugget: model.nugget };
    rainprint(
      ...['fit', file('stations.csv'), '-o', file('isoscape.json'), '--isotope', 'd18O'],
      ...['--family', model.family, '--terms', 'zonal1,elevation'],
      ...Object.entries(fix).flatMap(([key, value]) => ['--fix', `d18O.${key}=${value}`]),
    );
    const tolerance = 1e-9 * standardDeviation(stations.value);
    const expected = model.mean.map((value) => value + SHIFT);

    // What the isoscape file holds, to all digits.
    const isoscape = readIsoscape(readFileSync(file('isoscape.json'), 'utf8'));
    expect(isoscape.stations.id).toHaveLength(stations.id.length);
    for (const target of ['site', 'field'] as const) {
      const out = createPredictions(places.lonDeg.length);
      predictPlaces(isoscape, toPlaces(places), out, { target, plugIn: true });
      const se = target === 'site' ? model.siteSe : model.fieldSe;
      expect(largestDifference(out.d18O, expected)).toBeLessThanOrEqual(tolerance);
      expect(largestDifference(out.varD18O.map(Math.sqrt), se)).toBeLessThanOrEqual(tolerance);
    }

    // What `sites` prints, to its four decimals.
    for (const target of ['site', 'field'] as const) {
      const text = rainprint(
        'sites',
        file('isoscape.json'),
        file('sites.csv'),
        '--plug-in',
        '--target',
        target,
      );
      const rows = parse(text, { columns: true }) as Record<string, string>[];
      const se = target === 'site' ? model.siteSe : model.fieldSe;
      expect(rows.map((row) => row.id)).toEqual(places.lonDeg.map((_, i) => `P${i}`));
      const half = 0.5e-4 + 1e-9;
      expect(
        largestDifference(
          rows.map((row) => Number(row.d18O)),
          expected,
        ),
      ).toBeLessThanOrEqual(half);
      expect(
        largestDifference(
          rows.map((row) => Number(row.d18O_se)),
          se,
        ),
      ).toBeLessThanOrEqual(half);
    }
  });
});
