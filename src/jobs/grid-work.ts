import type { Target } from '../isoscape/index.js';
import type { CogFormat, GridFrame } from '../raster/index.js';
import type { BandName } from './grid-bands.js';
import type { GridRounding } from './grid-rounding.js';
import type { GroundNames } from './grid-sources.js';

/**
 * What a worker must know to make any block of a grid: plain data, the same for every block, so that a block can be
 * made by a thread, another process or another machine that has the named files.
 */
export interface GridWork {
  /** The isoscape as its file's text. */
  readonly isoscapeText: string;
  readonly frame: GridFrame;
  readonly ground: GroundPaths;
  readonly groundNames: GroundNames;
  readonly target: Target;
  readonly plugIn: boolean;
  /** ‰ of δ18O. */
  readonly tolerance: number;
  readonly exact: boolean;
  readonly rounding: GridRounding | null;
  /** One a file to write. */
  readonly files: readonly GridFileWork[];
}

/** The bands of one file and how they are encoded. */
export interface GridFileWork {
  readonly bands: readonly BandName[];
  readonly format: CogFormat;
}

/** Rasters and polygons that say what there is in a cell and whether it is wanted. */
export interface GroundPaths {
  readonly elevationPath: string;
  /** With the bundled grid, which covers the Earth, what is no land is sea and stands at 0 m. */
  readonly seaAtZero: boolean;
  readonly landOnly: boolean;
  readonly covariates: readonly { readonly name: string; readonly path: string }[];
  /** GeoJSON polygons outside which nothing is wanted. */
  readonly maskPath: string | null;
  /** A raster on the cells of the frame: nothing is wanted where it has no value. */
  readonly templatePath: string | null;
}

/** A block is one tile of the file. */
export interface GridBlock {
  readonly blockColumn: number;
  readonly blockRow: number;
  readonly firstColumn: number;
  readonly firstRow: number;
  readonly width: number;
  readonly height: number;
}
