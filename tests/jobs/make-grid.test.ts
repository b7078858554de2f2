import { readdirSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import proj4 from 'proj4';
import { beforeAll, describe, expect, it } from 'vitest';
import {
  createPlaces,
  createPredictions,
  createSupport,
  type Isoscape,
  predictPlaces,
  SUPPORT_FLAGS,
} from '../../src/isoscape/index.js';
import { dExcessVariance } from '../../src/isotope/index.js';
import { type GridRequest, makeGrid } from '../../src/jobs/index.js';
import {
  bundledElevationPath,
  type FrameElevation,
  type GridFrame,
  openElevation,
} from '../../src/raster/index.js';
import { fitCsv, HELD } from '../support/fit-csv.js';
import { gridRequest, readBandNames, readBands, readItems } from '../support/grid-request.js';
import { writeInventedLand } from '../support/invented-land.js';
import { inventNetwork } from '../support/invented-network.js';
import { scratchFolder } from '../support/scratch.js';

const folder = scratchFolder();
const landPath = join(folder, 'land.tif');
const AREA = { bounds: '-34,-50,-26,-42', cell: '0.2' }; // 40 × 40 cells
let isoscape: Isoscape;
let fileCount = 0;
const newPath = () => join(folder, `grid-${fileCount++}.tif`);
const unfinished = () => readdirSync(folder).filter((name) => name.endsWith('.tmp'));

beforeAll(async () => {
  await writeInventedLand(landPath);
  isoscape = await fitCsv(inventNetwork({ stationCount: 40, seed: 7 }).csv, HELD);
});

const request = (change: Partial<GridRequest> = {}, frame: object = AREA) =>
  gridRequest(isoscape, landPath, frame, change);

/** What the library answers for a cell of a frame in degrees, computed by itself. */
function exactCell(frame: GridFrame, cells: FrameElevation, k: number) {
  const lonDeg = frame.originX + ((k % frame.width) + 0.5) * frame.cellWidth;
  const latDeg = frame.originY - (Math.floor(k / frame.width) + 0.5) * frame.cellHeight;
  return exactPlace(lonDeg, latDeg, cells, k);
}

function exactPlace(lonDeg: number, latDeg: number, { elevationM, varianceM2 }: FrameElevation, k: number) {
  const places = createPlaces(1);
  const out = createPredictions(1);
  places.lonDeg[0] = lonDeg;
  places.latDeg[0] = latDeg;
  places.elevationM[0] = elevationM[k]!;
  places.elevationVarM2[0] = varianceM2[k]!;
  predictPlaces(isoscape, places, out, { plugIn: true });
  const [o, h, varO, varH, cov] = [out.d18O[0]!, out.d2H[0]!, out.varD18O[0]!, out.varD2H[0]!, out.cov[0]!];
  const seD = Math.sqrt(dExcessVariance(varO, cov, varH));
  return [o, Math.sqrt(varO), h, Math.sqrt(varH), h - 8 * o, seD, cov] as const;
}

async function elevationsOf({ frame, ground }: GridRequest): Promise<FrameElevation> {
  const grid = await openElevation(ground.elevationPath);
  const { width, height } = frame;
  const cells = await grid.sampleFrame(frame, { firstColumn: 0, firstRow: 0, width, height });
  await grid.close();
  return cells;
}

describe('makeGrid predicts each cell at its centre and elevation', () => {
  it.each([
    [
      'within the tolerance and half a rounding step',
      {},
      [0.00525, 0.00525, 0.042, 0.042, 0.046, 0.042, 0.1],
    ],
    // float32 keeps 24 bits, and d-excess is made of two rounded ones
    ['exactly', { exact: true, fullPrecision: true }, [1e-6, 1e-7, 1e-5, 1e-6, 2e-5, 1e-6, 1e-6]],
  ] as const)('%s', async (_, change, allowed) => {
    const path = newPath();
    const asked = await request(change);
    const result = await makeGrid(path, asked, { threads: 0 });
    const bands = await readBands(path);
    const cells = await elevationsOf(asked);
    let land = 0;
    for (let k = 0; k < 1600; k++) {
      const values = bands.map((band) => band[k]!);
      if (Number.isNaN(cells.elevationM[k])) {
        expect(values).toEqual(new Array(7).fill(-9999));
        continue;
      }
      land++;
      const exact = exactCell(asked.frame, cells, k);
      for (const [b, value] of values.entries()) {
        if (Math.abs(value - exact[b]!) > allowed[b]!) expect([k, b, value]).toEqual([k, b, exact[b]]);
      }
    }
    expect(land).toBeGreaterThan(900);
    expect(result.counts).toMatchObject({ predicted: land, withoutElevation: 1600 - land, sea: 0 });
  });

  it('in metres of a projected system too', async () => {
    const path = newPath();
    const frame = { crs: 'EPSG:32725', bounds: '400000,4800000,600000,5000000', cell: '10000' };
    const asked = await request({ exact: true, fullPrecision: true }, frame);
    await makeGrid(path, asked, { threads: 0 });
    const bands = await readBands(path);
    const cells = await elevationsOf(asked);
    const utm = proj4('+proj=utm +zone=25 +south +datum=WGS84 +units=m');
    let land = 0;
    for (let k = 0; k < 400; k++) {
      if (Number.isNaN(cells.elevationM[k])) continue;
      land++;
      const centre = [405_000 + 10_000 * (k % 20), 4_995_000 - 10_000 * Math.floor(k / 20)];
      const [lonDeg, latDeg] = utm.inverse(centre) as [number, number];
      const exact = exactPlace(lonDeg, latDeg, cells, k);
      for (const [b, value] of exact.entries()) expect(Math.abs(bands[b]![k]! - value)).toBeLessThan(2e-5);
    }
    expect(land).toBeGreaterThan(300);
  });

  it('with the sea at 0 m where the elevations know it, or without it', async () => {
    const area = { bounds: '-9.5,36,3.5,44', cell: '0.5' };
    const ground = (landOnly: boolean) => ({
      elevationPath: bundledElevationPath(),
      seaAtZero: true,
      landOnly,
    });
    const [all, land] = [newPath(), newPath()];
    const base = await gridRequest(isoscape, bundledElevationPath(), area);
    const asked = (landOnly: boolean) => ({
      ...base,
      exact: true,
      fullPrecision: true,
      ground: { ...base.ground, ...ground(landOnly) },
    });
    const whole = await makeGrid(all, asked(false), { threads: 0 });
    const dry = await makeGrid(land, asked(true), { threads: 0 });
    expect(whole.counts).toMatchObject({ predicted: 26 * 16, sea: 0 });
    expect(dry.counts.predicted + dry.counts.sea).toBe(26 * 16);
    expect(dry.counts.sea).toBeGreaterThan(100);
    const [everywhere, dryOnly] = [await readBands(all), await readBands(land)];
    const cells = await elevationsOf(asked(false));
    for (let k = 0; k < 26 * 16; k++) {
      if (cells.ground[k] === 0) {
        expect(dryOnly.map((band) => band[k])).toEqual(everywhere.map((band) => band[k]));
        continue;
      }
      expect(dryOnly[0]![k]).toBe(-9999);
      const atSea = { ...cells, elevationM: new Float32Array(416), varianceM2: new Float32Array(416) };
      expect(Math.abs(everywhere[0]![k]! - exactCell(base.frame, atSea, k)[0])).toBeLessThan(1e-5);
    }
    expect(await readItems(all)).toMatchObject({ sea: 'predicted at 0 m' });
    expect(await readItems(land)).toMatchObject({ sea: 'nodata' });
  });
});

describe('makeGrid rounds', () => {
  it('to powers of two below the tolerance, with a d-excess exact to the last bit', async () => {
    const path = newPath();
    await makeGrid(path, await request(), { threads: 0 });
    const [d18O, seO, d2H, seH, dexcess, seD, cov] = await readBands(path);
    let land = 0;
    for (let k = 0; k < d18O!.length; k++) {
      if (d18O![k] === -9999) continue;
      land++;
      for (const value of [d18O![k]! * 2048, seO![k]! * 2048]) expect(Number.isInteger(value)).toBe(true);
      for (const value of [d2H![k]!, seH![k]!, seD![k]!, cov![k]!]) {
        expect(Number.isInteger(value * 256)).toBe(true);
      }
      expect(dexcess![k]).toBe(d2H![k]! - 8 * d18O![k]!); // in float64: no rounding at all
    }
    expect(land).toBeGreaterThan(900);
    expect((await readItems(path)).rounding).toContain('2^-11');
  });

  it('finer where the tolerance is smaller, and not at all on request', async () => {
    const [fine, full, usual] = [newPath(), newPath(), newPath()];
    const options = { threads: 0 };
    await makeGrid(fine, await request({ tolerance: 0.001 }), options);
    await makeGrid(full, await request({ fullPrecision: true }), options);
    await makeGrid(usual, await request(), options);
    const share = async (path: string, steps: number) => {
      const values = (await readBands(path))[0]!.filter((value) => value !== -9999);
      return values.filter((value) => Number.isInteger(value * steps)).length / values.length;
    };
    expect(await share(fine, 2 ** 13)).toBe(1);
    expect(await share(fine, 2 ** 12)).toBeLessThan(0.7);
    expect(await share(full, 2 ** 13)).toBeLessThan(0.2);
    expect(await readItems(full)).toMatchObject({ rounding: 'none: full precision' });
    expect((await readItems(fine)).tolerance).toMatch(/^0\.001 permil .* 0\.008 permil/);
    const [a, b] = [await readBands(full), await readBands(usual)];
    expect(Math.max(...a[0]!.map((value, k) => Math.abs(value - b[0]![k]!)))).toBeLessThanOrEqual(2 ** -12);
  });
});

describe('makeGrid writes the bands asked for', () => {
  it('in their own order, d-excess of a rounded pair that is not written itself', async () => {
    const [all, some] = [newPath(), newPath()];
    await makeGrid(all, await request(), { threads: 0 });
    await makeGrid(some, await request({ bands: ['dexcess', 'd18O_se'] }), { threads: 0 });
    expect(await readBandNames(some)).toEqual(['d18O_se', 'dexcess']);
    const [of, picked] = [await readBands(all), await readBands(some)];
    expect(picked).toEqual([of[1], of[4]]);
  });

  it('with support as bits that createSupport would set', async () => {
    const path = newPath();
    const asked = await request({ support: true }, { bounds: '-36,-52,-24,-40', cell: '0.5' });
    const result = await makeGrid(path, asked, { threads: 0 });
    const bands = await readBands(path);
    expect(bands).toHaveLength(8);
    const support = createSupport(isoscape);
    const cells = await elevationsOf(asked);
    let flagged = 0;
    for (let k = 0; k < bands[7]!.length; k++) {
      if (bands[0]![k] === -9999) {
        expect(bands[7]![k]).toBe(-9999);
        continue;
      }
      const lonDeg = -36 + ((k % 24) + 0.5) * 0.5;
      const latDeg = -40 - (Math.floor(k / 24) + 0.5) * 0.5;
      const flags = support.flags(lonDeg, latDeg, cells.elevationM[k]!, false);
      const bits = flags.reduce((sum, flag) => sum + 2 ** SUPPORT_FLAGS.indexOf(flag), 0);
      expect(bands[7]![k]).toBe(bits);
      if (bits > 0) flagged++;
    }
    expect(flagged).toBeGreaterThan(5);
    expect(result.counts.flagged).toBe(flagged);
    expect((await readItems(path)).support_bits).toMatch(
      /^1 outside-hull, 2 far-from-stations, 4 elevation-/,
    );
  });

  it('one a file, all of them or none', async () => {
    const path = newPath();
    const [whole, name] = [newPath(), path.slice(0, -4)];
    await makeGrid(whole, await request(), { threads: 0 });
    const result = await makeGrid(path, await request({ split: true, support: true }), { threads: 0 });
    const names = ['d18O', 'd18O_se', 'd2H', 'd2H_se', 'dexcess', 'dexcess_se', 'cov_d18O_d2H', 'support'];
    expect(result.files.map((file) => file.path)).toEqual(names.map((band) => `${name}.${band}.tif`));
    const bands = await readBands(whole);
    for (const [b, band] of names.slice(0, 7).entries()) {
      expect(await readBands(`${name}.${band}.tif`)).toEqual([bands[b]]);
      expect(await readBandNames(`${name}.${band}.tif`)).toEqual([band]);
    }
    expect(unfinished()).toEqual([]);
  });

  it('all of one isotope: two, and support', async () => {
    const csv = inventNetwork({ stationCount: 40, seed: 7 }).csv;
    for (const isotope of ['d18O', 'd2H'] as const) {
      const one = await fitCsv(csv, { family: 'exponential', terms: ['elevation'] }, { isotopes: isotope });
      const path = newPath();
      const asked = await gridRequest(one, landPath, AREA, { support: true });
      const { check } = await makeGrid(path, asked, { threads: 0 });
      expect(await readBandNames(path)).toEqual([isotope, `${isotope}_se`, 'support']);
      const [value, se] = await readBands(path);
      const k = 20 * 40 + 20;
      expect(value![k]).toBeLessThan(0);
      expect(se![k]).toBeGreaterThan(0);
      expect(check.cells).toBeGreaterThan(100);
      const items = await readItems(path);
      expect(items[`largest_error_${isotope}`]).toBeDefined();
      expect(items.largest_error_dexcess).toBeUndefined();
    }
  });

  it.each([
    [['d180'], 'no band is called "d180" here; there are d18O, d18O_se, d2H'],
    [[], 'there are d18O'],
  ])('and refuses %j', async (bands, message) => {
    const asked = await request({ bands });
    await expect(makeGrid(newPath(), asked, { threads: 0 })).rejects.toMatchObject({
      code: 'BAND_UNKNOWN',
      message: expect.stringContaining(message),
    });
  });
});

describe('makeGrid says how accurate it is', () => {
  it('by computing a sample of cells again, the same one every time', async () => {
    const [a, b] = [newPath(), newPath()];
    const options = { threads: 0 };
    const first = await makeGrid(a, await request(), options);
    const second = await makeGrid(b, await request(), options);
    expect(first.check).toEqual(second.check);
    expect(first.check.cells).toBeGreaterThan(100);
    expect(first.check.cells).toBeLessThan(256);
    for (const [name, most] of Object.entries(first.check.largest)) {
      expect(most).toBeLessThanOrEqual(name.startsWith('d18O') ? 0.005 : 0.04);
    }
    const items = await readItems(a);
    expect(items.largest_error_d2H_se).toBe(first.check.largest.d2H_se.toPrecision(3));
    expect(items.checked_cells).toBe(String(first.check.cells));
  });

  it('or that every cell was computed', async () => {
    const path = newPath();
    await makeGrid(path, await request({ exact: true }), { threads: 0 });
    const items = await readItems(path);
    expect(items.tolerance).toBe('0 (every cell computed exactly)');
    expect(items.checked_cells).toBeUndefined();
  });
});

describe('makeGrid leaves no file', () => {
  const rejected = async (asked: GridRequest, path = newPath()) => {
    const failure = makeGrid(path, asked, { threads: 0 });
    await expect(failure).rejects.toMatchObject({ code: 'GRID_EMPTY' });
    expect(unfinished()).toEqual([]);
    return failure.catch((error: Error) => error.message);
  };

  it('where no cell has a value, and says why', async () => {
    expect(await rejected(await request({}, { bounds: '0,0,5,5', cell: '1' }))).toContain(
      '25 have no elevation in land.tif',
    );
    const base = await gridRequest(isoscape, bundledElevationPath(), {
      bounds: '-34,-50,-26,-42',
      cell: '1',
    });
    const sea = { ...base, ground: { ...base.ground, seaAtZero: true, landOnly: true } };
    expect(await rejected(sea)).toContain('64 are sea in elevation-5min.tif');
  });

  it('where a mask lies elsewhere: before any work', async () => {
    const maskPath = join(folder, 'elsewhere.geojson');
    const ring = [
      [10, 10],
      [20, 10],
      [20, 20],
      [10, 10],
    ];
    writeFileSync(maskPath, JSON.stringify({ type: 'Polygon', coordinates: [ring] }));
    const asked = await request();
    const masked = { ...asked, ground: { ...asked.ground, maskPath } };
    await expect(makeGrid(newPath(), masked, { threads: 0 })).rejects.toMatchObject({ code: 'MASK_OUTSIDE' });
  });

  it('where the call is stopped, and keeps what was there', async () => {
    const path = newPath();
    writeFileSync(path, 'older');
    const stop = new AbortController();
    const onProgress = () => stop.abort();
    const asked = await request({}, { bounds: '-34,-50,-26,-42', cell: '0.02' });
    const job = makeGrid(path, asked, { threads: 0, signal: stop.signal, onProgress });
    await expect(job).rejects.toMatchObject({ name: 'AbortError' });
    expect(readdirSync(folder)).toContain(path.slice(folder.length + 1));
    expect(unfinished()).toEqual([]);
    await expect(makeGrid(path, asked, { signal: AbortSignal.abort() })).rejects.toMatchObject({
      name: 'AbortError',
    });
  });
});

describe('makeGrid', () => {
  it('takes a mask: cells whose centre lies outside have no value', async () => {
    const maskPath = join(folder, 'mask.geojson');
    const ring = [
      [-32, -48],
      [-29, -48],
      [-29, -45],
      [-32, -45],
      [-32, -48],
    ];
    writeFileSync(maskPath, JSON.stringify({ type: 'Polygon', coordinates: [ring] }));
    const asked = await request();
    const [all, some] = [newPath(), newPath()];
    await makeGrid(all, asked, { threads: 0 });
    const masked = { ...asked, ground: { ...asked.ground, maskPath } };
    const { counts } = await makeGrid(some, masked, { threads: 0 });
    expect(counts.masked).toBe(1600 - 15 * 15);
    const [a, b] = [await readBands(all), await readBands(some)];
    for (let k = 0; k < 1600; k++) {
      const [x, y] = [(k % 40) * 0.2 - 34 + 0.1, -42 - 0.1 - Math.floor(k / 40) * 0.2];
      const inside = x > -32 && x < -29 && y > -48 && y < -45;
      expect(b[0]![k]).toBe(inside ? a[0]![k] : -9999);
    }
    expect((await readItems(some)).mask).toMatch(/^mask\.geojson sha256:[0-9a-f]{12}$/);
  });

  it('takes the cells of another raster, and leaves nodata where it has none', async () => {
    const path = newPath();
    const asked = await request({}, { like: landPath });
    const { width, height, counts } = await makeGrid(path, asked, { threads: 0 });
    expect([width, height]).toEqual([100, 100]);
    const [[land], [d18O]] = [await readBands(landPath), await readBands(path)];
    for (let k = 0; k < 10_000; k++) expect(d18O![k] === -9999).toBe(land![k] === -9999);
    expect(counts.masked).toBe(land!.filter((value) => value === -9999).length);
  });

  it('leaves cells nodata whose value cannot be precipitation, and counts them', async () => {
    const csv = inventNetwork({ stationCount: 40, seed: 7 }).csv;
    const steep = await fitCsv(csv, { ...HELD, terms: ['zonal1', 'elevation'] });
    const path = newPath();
    const frame = { bounds: '10,-35,40,70', cell: '5' };
    const asked = await gridRequest(steep, bundledElevationPath(), frame, { exact: true });
    const { counts } = await makeGrid(path, asked, { threads: 0 });
    expect(counts.impossible).toBeGreaterThan(0);
    expect(counts.predicted).toBeGreaterThan(0);
    const bands = await readBands(path);
    expect(bands[0]!.filter((value) => value !== -9999)).toHaveLength(counts.predicted);
    expect(Math.max(...bands[0]!)).toBeLessThanOrEqual(25);
    expect(Math.max(...bands[2]!)).toBeLessThanOrEqual(160);
  });

  it('tells how far it is, up to the last cell', async () => {
    const seen: number[] = [];
    await makeGrid(newPath(), await request({ exact: true }, { bounds: AREA.bounds, cell: '0.02' }), {
      threads: 0,
      onProgress: (done, total) => {
        expect(total).toBe(160_000);
        seen.push(done);
      },
    });
    expect(seen.length).toBeGreaterThanOrEqual(3); // four blocks of 256 × 256 cut short
    expect(seen.at(-1)).toBe(160_000);
    expect([...seen].sort((a, b) => a - b)).toEqual(seen);
  });

  it('says amount-weighted only where that is known', async () => {
    const path = newPath();
    await makeGrid(path, await request(), { threads: 0 });
    const items = await readItems(path);
    expect(items).toMatchObject({
      isoscape_id: isoscape.id,
      target: 'site',
      parameters: 'plug-in',
      stations: '40',
      elevation_source: expect.stringMatching(/^land\.tif sha256:[0-9a-f]{12}$/),
      tool_version: 'test',
    });
  });
});
