import { fromFile } from 'geotiff';
import { type Isoscape, writeIsoscape } from '../../src/isoscape/index.js';
import { type FrameOptions, type GridRequest, planFrame } from '../../src/jobs/index.js';

/** A request for a plug-in grid of everything by default; the elevation file is the user's own. */
export async function gridRequest(
  isoscape: Isoscape,
  elevationPath: string,
  frame: FrameOptions,
  change: Partial<GridRequest> = {},
): Promise<GridRequest> {
  const plan = await planFrame(frame);
  return {
    isoscapeText: writeIsoscape(isoscape),
    frame: plan.frame,
    ground: {
      elevationPath,
      seaAtZero: false,
      landOnly: false,
      covariates: [],
      maskPath: null,
      templatePath: plan.templatePath,
    },
    target: 'site',
    plugIn: true,
    tolerance: 0.005,
    exact: false,
    bands: null,
    support: false,
    split: false,
    fullPrecision: false,
    tileSizePx: 256,
    toolVersion: 'test',
    ...change,
  };
}

/** The bands of the full resolution, as stored. */
export async function readBands(path: string): Promise<Float32Array[]> {
  const tiff = await fromFile(path);
  const bands = await (await tiff.getImage()).readRasters();
  await tiff.close();
  return Array.from(bands as unknown as Float32Array[]);
}

/** Metadata items of the file. */
export async function readItems(path: string): Promise<Record<string, string>> {
  const tiff = await fromFile(path);
  const items = await (await tiff.getImage()).getGDALMetadata();
  await tiff.close();
  return (items ?? {}) as Record<string, string>;
}

/** Names of the bands, in the order of the file. */
export async function readBandNames(path: string): Promise<string[]> {
  const tiff = await fromFile(path);
  const image = await tiff.getImage();
  const names: string[] = [];
  for (let b = 0; b < image.getSamplesPerPixel(); b++) {
    names.push(String(((await image.getGDALMetadata(b)) as Record<string, string>).DESCRIPTION));
  }
  await tiff.close();
  return names;
}
