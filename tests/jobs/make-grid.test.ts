import { existsSync, readdirSync } from 'node:fs';
import { join } from 'node:path';
import { fromFile } from 'geotiff';
import { describe, expect, it } from 'vitest';
import type { Places, Predictions } from '../../src/isoscape/places.js';
import { type GridRequest, makeGrid, parseBounds, planGrid } from '../../src/jobs/index.js';
import type { ElevationGrid } from '../../src/raster/index.js';
import { scratchFolder } from '../support/scratch.js';

const folder = scratchFolder();
let fileCount = 0;
const newPath = () => join(folder, `grid-${fileCount++}.tif`);

/** Elevations without a file: land where the test says, heights that tell the place. */
const elevation = (isLand: (lonDeg: number, latDeg: number) => boolean): ElevationGrid => ({
  source: 'invented',
  sample: () => Promise.reject(new Error('a grid asks for cells')),
  close: () => Promise.resolve(),
  sampleGrid: async (grid) => {
    const elevationM = new Float32Array(grid.width * grid.height);
    elevationM.forEach((_, k) => {
      const lonDeg = grid.westDeg + ((k % grid.width) + 0.5) * grid.cellDeg;
      const latDeg = grid.northDeg - (Math.floor(k / grid.width) + 0.5) * grid.cellDeg;
      elevationM[k] = isLand(lonDeg, latDeg) ? 100 + latDeg : Number.NaN;
    });
    return { elevationM, varianceM2: elevationM.map((m) => m / 2) };
  },
});

/** A stand-in for the model whose answer tells which place it was asked about. */
const predict = (places: Places, out: Predictions): void => {
  for (let i = 0; i < places.count; i++) {
    out.d18O[i] = places.lonDeg[i]! / 10;
    out.d2H[i] = places.latDeg[i]! + places.elevationM[i]! / 1000;
    out.varD18O[i] = 0.5 + places.elevationVarM2[i]! / 1000;
    out.varD2H[i] = 30;
    out.cov[i] = 3;
  }
};

const request = (bounds: string, cellDeg: number, change: Partial<GridRequest> = {}): GridRequest => ({
  plan: planGrid(parseBounds(bounds), cellDeg),
  isotopes: 'both',
  amountWeighted: true,
  predict,
  support: () => [],
  placesPerTurn: 100,
  elevation: elevation(() => true),
  items: { isoscape_id: 'x' },
  software: 'test',
  ...change,
});

async function readBands(path: string): Promise<Float32Array[]> {
  const tiff = await fromFile(path);
  const bands = await (await tiff.getImage()).readRasters();
  await tiff.close();
  return Array.from(bands as unknown as Float32Array[]);
}

describe('makeGrid', () => {
  it('predicts each land cell at its centre and elevation, nodata elsewhere', async () => {
    const path = newPath();
    const isLand = (lonDeg: number, latDeg: number) => lonDeg > 3 || latDeg > 52;
    const made = request('-10,40,20,60', 0.1, { elevation: elevation(isLand) });
    const result = await makeGrid(path, made);
    const bands = await readBands(path);
    let land = 0;
    for (let k = 0; k < 300 * 200; k++) {
      const lonDeg = -10 + ((k % 300) + 0.5) * 0.1;
      const latDeg = 60 - (Math.floor(k / 300) + 0.5) * 0.1;
      if (!isLand(lonDeg, latDeg)) {
        if (!bands.every((band) => band[k] === -9999)) expect(bands.map((band) => band[k])).toEqual([]);
        continue;
      }
      land++;
      const elevationM = 100 + latDeg;
      const varD18O = 0.5 + elevationM / 2000;
      const expected = [lonDeg / 10, Math.sqrt(varD18O), latDeg + elevationM / 1000, Math.sqrt(30)];
      expected.forEach((value, b) => {
        if (Math.abs(bands[b]![k]! - value) > 1e-5) expect(bands[b]![k]).toBeCloseTo(value, 5);
      });
    }
    expect(result).toEqual({
      width: 300,
      height: 200,
      landCells: land,
      impossibleCells: 0,
      flaggedCells: 0,
      flags: {},
    });
  });

  it('has a d-excess of its own pair and an error of the joint error', async () => {
    const path = newPath();
    await makeGrid(path, request('-10,40,20,60', 0.5));
    const [d18O, seO, d2H, seH, dexcess, seD, cov] = await readBands(path);
    for (let k = 0; k < d18O!.length; k++) {
      expect(dexcess![k]).toBe(Math.fround(d2H![k]! - 8 * d18O![k]!));
      const variance = seH![k]! ** 2 + 64 * seO![k]! ** 2 - 16 * cov![k]!;
      expect(seD![k]).toBeCloseTo(Math.sqrt(variance), 4);
    }
  });

  it('asks over the antimeridian with longitudes in the usual range', async () => {
    const path = newPath();
    await makeGrid(path, request('170,-25,-170,-10', 1));
    const [d18O] = await readBands(path);
    expect(Array.from(d18O!.slice(0, 20), (v) => Math.round(v * 100) / 10)).toEqual([
      170.5, 171.5, 172.5, 173.5, 174.5, 175.5, 176.5, 177.5, 178.5, 179.5, -179.5, -178.5, -177.5, -176.5,
      -175.5, -174.5, -173.5, -172.5, -171.5, -170.5,
    ]);
    const tiff = await fromFile(path);
    expect((await tiff.getImage()).getBoundingBox()).toEqual([170, -25, 190, -10]);
    await tiff.close();
  });

  it('gives the same file however many places go at once', async () => {
    const [a, b] = [newPath(), newPath()];
    await makeGrid(a, request('-10,40,20,60', 0.25, { placesPerTurn: 7 }));
    await makeGrid(b, request('-10,40,20,60', 0.25, { placesPerTurn: 4096 }));
    expect(await readBands(a)).toEqual(await readBands(b));
  });

  it('writes the two bands of a one-isotope isoscape', async () => {
    for (const isotopes of ['d18O', 'd2H'] as const) {
      const path = newPath();
      await makeGrid(path, request('0,0,2,2', 1, { isotopes }));
      const tiff = await fromFile(path);
      const image = await tiff.getImage();
      expect(image.getSamplesPerPixel()).toBe(2);
      expect(await image.getGDALMetadata(0)).toMatchObject({ DESCRIPTION: isotopes, UNITTYPE: 'permil' });
      expect(await image.getGDALMetadata(1)).toMatchObject({ DESCRIPTION: `${isotopes}_se` });
      await tiff.close();
      const [value] = await readBands(path);
      expect(value![0]).toBeCloseTo(isotopes === 'd18O' ? 0.05 : 1.5 + 0.1015, 5);
    }
  });

  it('leaves cells nodata whose value cannot be precipitation, and counts them', async () => {
    const path = newPath();
    const tooHigh = (places: Places, out: Predictions) => {
      predict(places, out);
      for (let i = 0; i < places.count; i++) if (places.lonDeg[i]! > 7) out.d18O[i] = 36.4;
    };
    const result = await makeGrid(path, request('0,0,10,10', 1, { predict: tooHigh, support: () => ['x'] }));
    expect(result).toMatchObject({ landCells: 70, impossibleCells: 30, flaggedCells: 70, flags: { x: 70 } });
    const bands = await readBands(path);
    for (let k = 0; k < 100; k++) {
      for (const band of bands) expect(band[k] === -9999).toBe(k % 10 >= 7);
    }
    const one = await makeGrid(newPath(), request('0,0,10,10', 1, { predict: tooHigh, isotopes: 'd2H' }));
    expect(one).toMatchObject({ landCells: 100, impossibleCells: 0 });
  });

  it('says amount-weighted only where that is known', async () => {
    for (const amountWeighted of [true, false]) {
      const path = newPath();
      await makeGrid(path, request('0,0,2,2', 1, { amountWeighted }));
      const tiff = await fromFile(path);
      const said = JSON.stringify(await (await tiff.getImage()).getGDALMetadata(2));
      expect(said).toContain('δ2H, ');
      expect(said).toContain('mean of local rain, VSMOW-SLAP');
      expect(said.includes('amount-weighted')).toBe(amountWeighted);
      await tiff.close();
    }
  });

  it('counts the land cells that lean on little, by reason', async () => {
    const support = (lonDeg: number, latDeg: number) => [
      ...(lonDeg > 5 ? ['far-from-stations'] : []),
      ...(latDeg > 5 ? ['outside-hull'] : []),
    ];
    const result = await makeGrid(newPath(), request('0,0,10,10', 1, { support }));
    expect(result).toMatchObject({
      landCells: 100,
      flaggedCells: 75,
      flags: { 'far-from-stations': 50, 'outside-hull': 50 },
    });
  });

  it('tells how far it is, up to the last cell', async () => {
    const seen: number[] = [];
    await makeGrid(newPath(), request('0,0,10,10', 0.1), {
      onProgress: (done, total) => {
        expect(total).toBe(10_000);
        seen.push(done);
      },
    });
    expect(seen.length).toBeGreaterThan(50);
    expect(seen).toEqual([...seen].sort((a, b) => a - b));
    expect(seen.at(-1)).toBe(10_000);
  });
});

describe('makeGrid leaves no file', () => {
  it('where no cell has an elevation', async () => {
    const path = newPath();
    const job = makeGrid(path, request('0,0,2,2', 1, { elevation: elevation(() => false) }));
    await expect(job).rejects.toMatchObject({ code: 'GRID_EMPTY' });
    expect(existsSync(path)).toBe(false);
  });

  it('where no value can be precipitation', async () => {
    const path = newPath();
    const tooLow = (places: Places, out: Predictions) => {
      predict(places, out);
      out.d2H.fill(-700);
    };
    const job = makeGrid(path, request('0,0,2,2', 1, { predict: tooLow }));
    await expect(job).rejects.toMatchObject({
      code: 'GRID_EMPTY',
      message: expect.stringMatching(/all 4 land cells/),
    });
    expect(existsSync(path)).toBe(false);
  });

  it('where the model fails, or the call is stopped', async () => {
    const path = newPath();
    const failing = () => {
      throw new Error('no answer');
    };
    await expect(makeGrid(path, request('0,0,2,2', 1, { predict: failing }))).rejects.toThrow('no answer');
    const stop = new AbortController();
    const onProgress = (done: number) => {
      if (done > 500) stop.abort();
    };
    const job = makeGrid(path, request('0,0,10,10', 0.1), { signal: stop.signal, onProgress });
    await expect(job).rejects.toMatchObject({ name: 'AbortError' });
    expect(existsSync(path)).toBe(false);
    expect(readdirSync(folder).filter((name) => name.endsWith('.tmp'))).toEqual([]);
  });
});
