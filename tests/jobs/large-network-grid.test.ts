/** A grid of a network beyond 1,500 stations: which stations enter a cell, and what the file says of it. */
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { type Isoscape, measureNearestError } from '../../src/isoscape/index.js';
import { type GridResult, makeGrid } from '../../src/jobs/index.js';
import { fitCsv, HELD } from '../support/fit-csv.js';
import { gridRequest, readItems } from '../support/grid-request.js';
import { writeInventedLand } from '../support/invented-land.js';
import { inventNetwork } from '../support/invented-network.js';
import { scratchFolder } from '../support/scratch.js';

const folder = scratchFolder();
const landPath = join(folder, 'land.tif');
const STATIONS = 1501;
let isoscape: Isoscape;

async function grid(name: string, exact: boolean): Promise<{ result: GridResult; items: object }> {
  const path = join(folder, name);
  const frame = { bounds: '-32,-48,-30,-46', cell: exact ? '1' : '0.2' };
  const request = await gridRequest(isoscape, landPath, frame, { exact });
  const result = await makeGrid(path, request, { threads: 0 });
  return { result, items: await readItems(path) };
}

beforeAll(async () => {
  await writeInventedLand(landPath);
  const { csv } = inventNetwork({ stationCount: STATIONS, seed: 7 });
  isoscape = await fitCsv(csv, { ...HELD, likelihood: 'vecchia' });
});

describe(`a grid of ${STATIONS} stations`, () => {
  it('states what nearby stations cost, and takes no difference from sites for an error', async () => {
    const { result, items } = await grid('large.tif', false);
    const error = measureNearestError(isoscape);
    expect(result.nearestError).toEqual(error);
    expect(result.check.cells).toBeGreaterThan(50);
    expect(items).toMatchObject({
      stations: String(STATIONS),
      stations_used: '256 or more around each cell for its residual, all for the trend',
      nearest_compared: 'the 256 nearest with all stations, at 64 places near stations',
      nearest_largest_error_d18O: error.largest.d18O!.meanPerMil.toPrecision(3),
      nearest_largest_error_dexcess_se: error.largest.dexcess!.sePerMil.toPrecision(3),
      largest_difference_from_sites_d2H: result.check.largest.d2H.toPrecision(3),
    });
    expect(Object.keys(items).filter((name) => name.startsWith('largest_error'))).toEqual([]);
  });

  it('says that every station was used where every cell is computed exactly', async () => {
    const { result, items } = await grid('exact.tif', true);
    expect(result.nearestError).toBeNull();
    expect(items).toMatchObject({ stations_used: 'all', tolerance: '0 (every cell computed exactly)' });
    expect(Object.keys(items).filter((name) => name.startsWith('nearest'))).toEqual([]);
  });
});
