import { createHash } from 'node:crypto';
import { createReadStream } from 'node:fs';
import { basename } from 'node:path';
import type { Isoscape } from '../isoscape/index.js';
import { type CellWindow, type ElevationGrid, type GridFrame, openElevation } from '../raster/index.js';
import {
  closeCovariates,
  differingCovariates,
  type OpenCovariate,
  openIsoscapeCovariates,
} from './covariate-files.js';
import { type GridMask, openMask } from './grid-mask.js';
import { type GridTemplate, openTemplate } from './grid-template.js';
import type { GroundPaths } from './grid-work.js';

/** The open files behind a grid. */
export interface GroundSources {
  readonly elevation: ElevationGrid;
  /** In the isoscape's order. */
  readonly covariates: readonly OpenCovariate[];
  readonly mask: GridMask | null;
  readonly template: GridTemplate | null;
  close(): Promise<void>;
}

/** What the files are traced back to: name and first digits of the SHA-256. */
export interface GroundNames {
  readonly elevation: string;
  readonly covariates: readonly { readonly name: string; readonly source: string }[];
  readonly mask: string | null;
  readonly template: string | null;
  /** What a person should know of them. */
  readonly notes: readonly string[];
}

/**
 * Opens the files; none stays open where one cannot be read. Throws what `openElevation`, `openIsoscapeCovariates`,
 * `openMask` and `openTemplate` throw.
 *
 * @param known where the files were opened before, in another thread: rasters are then not hashed again
 */
export async function openGroundSources(
  paths: GroundPaths,
  isoscape: Isoscape,
  known: GroundNames | null,
): Promise<GroundSources> {
  const elevation = await openElevation(
    paths.elevationPath,
    known === null ? null : { source: known.elevation },
  );
  const open: (() => Promise<void>)[] = [() => elevation.close()];
  const close = async () => {
    for (const each of open) await each();
  };
  try {
    const template = paths.templatePath === null ? null : await openTemplate(paths.templatePath);
    if (template !== null) open.push(() => template.close());
    const mask = paths.maskPath === null ? null : await openMask(paths.maskPath);
    const files = paths.covariates.map((file) => {
      const source = known?.covariates.find(({ name }) => name === file.name)?.source;
      return source === undefined ? file : { ...file, source };
    });
    const covariates = await openIsoscapeCovariates(isoscape, files);
    open.push(() => closeCovariates(covariates));
    return { elevation, covariates: covariates.filter((each) => each !== null), mask, template, close };
  } catch (error) {
    await close();
    throw error;
  }
}

/** Opens the files once, so that what cannot be used is refused before any long work: also MASK_OUTSIDE. */
export async function checkGround(
  paths: GroundPaths,
  isoscape: Isoscape,
  frame: GridFrame,
): Promise<GroundNames> {
  const { elevation, covariates, mask, close } = await openGroundSources(paths, isoscape, null);
  try {
    mask?.checkTouches(frame);
    return {
      elevation: elevation.source,
      covariates: covariates.map(({ name, grid }) => ({ name, source: grid.source })),
      mask: mask?.source ?? null,
      template: paths.templatePath === null ? null : await sourceOf(paths.templatePath),
      notes: differingCovariates(isoscape, covariates),
    };
  } finally {
    await close();
  }
}

/** 1 where a window's cells are asked for, row-major; null where all are. */
export async function coveredCells(
  { mask, template }: GroundSources,
  frame: GridFrame,
  window: CellWindow,
): Promise<Uint8Array | null> {
  const inTemplate = (await template?.coverage?.(window)) ?? null;
  if (mask === null || inTemplate?.includes(1) === false) return inTemplate;
  const inMask = mask.coverage(frame, window);
  return inTemplate === null ? inMask : inMask.map((covered, k) => covered & inTemplate[k]!);
}

async function sourceOf(path: string): Promise<string> {
  const hash = createHash('sha256');
  for await (const chunk of createReadStream(path)) hash.update(chunk as Buffer);
  return `${basename(path)} sha256:${hash.digest('hex').slice(0, 12)}`;
}
