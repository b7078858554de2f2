import { copyFileSync } from 'node:fs';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { fitIsoscape, type Isoscape } from '../../src/isoscape/index.js';
import {
  closeCovariates,
  covariatesAt,
  differingCovariates,
  type OpenCovariate,
  openCovariates,
  openIsoscapeCovariates,
} from '../../src/jobs/covariate-files.js';
import { covariatesOfStations } from '../../src/jobs/station-covariates.js';
import type { Network } from '../../src/stations/index.js';
import { covariate, networkWithCovariate } from '../isoscape/covariate-network.js';
import { withStations } from '../isoscape/invented-isoscape.js';
import { writeCovariate } from '../support/covariate-raster.js';
import { scratchFolder } from '../support/scratch.js';

const folder = scratchFolder();
const at = (name: string) => join(folder, name);
const WET = { name: 'wet', path: at('wet.tif') };
const ARID = { name: 'arid', path: at('arid.tif') };
const whole = { rangeKm: 400, sill: 0.2, nugget: 0.01 };

/** An isoscape of the covariates arid and wet, in that order, fitted from those files by name. */
let isoscape: Isoscape;
/** Sixteen stations within the rasters. */
let network: Network;
beforeAll(async () => {
  await writeCovariate(WET.path, { seed: 1 });
  // No values in the west.
  await writeCovariate(ARID.path, { seed: 2, empty: (lonDeg) => lonDeg < -30 });
  const drawn = networkWithCovariate(3, 16);
  network = withStations(drawn.network, (_, i) => ({ lonDeg: -34 + 0.5 * i, latDeg: -50 + 0.4 * i }));
  const [wet] = await openCovariates([WET]);
  isoscape = fitIsoscape(network, {
    family: 'exponential',
    terms: [],
    fix: { along: whole, across: whole, turnDeg: 10 },
    covariates: [
      { ...covariate('wet', drawn.humidity.values), source: wet!.grid.source },
      covariate('arid', drawn.humidity.values.map(Math.sqrt)),
    ],
  });
  await closeCovariates([wet!]);
});

const sourcesOf = (opened: readonly (OpenCovariate | null)[]) => opened.map((each) => each?.name ?? null);

describe('openIsoscapeCovariates', () => {
  it('gives the rasters in the order of the isoscape, whatever the order of the call', async () => {
    const opened = await openIsoscapeCovariates(isoscape, [WET, ARID]);
    expect(sourcesOf(opened)).toEqual(['arid', 'wet']);
    await closeCovariates(opened);
  });

  it('leaves a gap where values come from elsewhere', async () => {
    const opened = await openIsoscapeCovariates(isoscape, [WET], ['arid']);
    expect(sourcesOf(opened)).toEqual([null, 'wet']);
    await closeCovariates(opened);
  });

  it('refuses a covariate without a raster, one the isoscape has not, and a raster that cannot be read', async () => {
    await expect(openIsoscapeCovariates(isoscape, [ARID])).rejects.toMatchObject({
      code: 'COVARIATE_MISSING',
      details: { covariate: 'wet' },
    });
    await expect(
      openIsoscapeCovariates(isoscape, [WET, ARID, { name: 'dew', path: 'x' }]),
    ).rejects.toMatchObject({
      code: 'COVARIATE_UNKNOWN',
      details: { covariate: 'dew' },
    });
    await expect(
      openIsoscapeCovariates(isoscape, [WET, { ...ARID, path: at('none.tif') }]),
    ).rejects.toMatchObject({
      code: 'FILE_NOT_FOUND',
    });
  });

  it('takes a source known from an earlier opening as it is', async () => {
    const [again] = await openCovariates([{ ...WET, source: 'known before' }]);
    expect(again!.grid.source).toBe('known before');
    await closeCovariates([again!]);
  });
});

describe('differingCovariates', () => {
  it('names rasters of other content, not those of another name', async () => {
    copyFileSync(WET.path, at('renamed.tif'));
    const opened = await openIsoscapeCovariates(isoscape, [{ name: 'wet', path: at('renamed.tif') }, ARID]);
    const found = differingCovariates(isoscape, opened);
    expect(found).toHaveLength(1);
    expect(found[0]).toMatch(
      /^covariate arid comes from arid\.tif sha256:.*fitted with arid\.tif sha256:0123456789ab$/,
    );
    await closeCovariates(opened);
  });
});

describe('covariatesAt', () => {
  it('samples every covariate at every place, NaN where there is no value', async () => {
    const opened = await openCovariates([ARID, WET]);
    const [arid, wet] = await covariatesAt(opened, [-33, -28, -60], [-45, -45, -45], 3);
    expect([...arid!].map(Number.isNaN)).toEqual([true, false, true]);
    expect([...wet!].map(Number.isNaN)).toEqual([false, false, true]);
    expect(await opened[1]!.grid.sample(-28, -45)).toEqual({ kind: 'value', value: wet![1] });
    expect(await covariatesAt([], [1], [2], 1)).toEqual([]);
    await closeCovariates(opened);
  });
});

describe('covariatesOfStations', () => {
  it('keeps stations that have all values, and says what the others lack', async () => {
    const opened = await openCovariates([ARID, WET]);
    const moved = withStations(network, (_, i) => (i === 15 ? { lonDeg: 20 } : {}));
    const sampled = await covariatesOfStations({ ...moved, stationsLeftOut: 4 }, opened);
    // Stations 0 to 7 stand from −34 to −30.5, in the west; station 15 beyond both rasters.
    expect(sampled.network.stations.map(({ id }) => id)).toEqual(
      moved.stations.slice(8, 15).map(({ id }) => id),
    );
    expect(sampled.network.stationsLeftOut).toBe(4 + 9);
    expect(sampled.lacking.map(({ station, covariate: name, reason }) => [station.id, name, reason])).toEqual(
      [
        ...moved.stations.slice(0, 8).map(({ id }) => [id, 'arid', 'nodata']),
        [moved.stations[15]!.id, 'arid', 'outside'],
        [moved.stations[15]!.id, 'wet', 'outside'],
      ],
    );
    for (const { values } of sampled.covariates) {
      expect(values).toHaveLength(7);
      expect(values.every(Number.isFinite)).toBe(true);
    }
    expect(sampled.covariates.map(({ source }) => source)).toEqual(opened.map(({ grid }) => grid.source));
    await closeCovariates(opened);
  });

  it('changes nothing where there are none', async () => {
    expect(await covariatesOfStations(network, [])).toEqual({ network, covariates: [], lacking: [] });
  });
});
