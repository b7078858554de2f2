import { createPlaces, type Isoscape, type Places } from '../isoscape/index.js';
import {
  type CellWindow,
  cellCentres,
  type FrameLocator,
  frameLocator,
  GROUND,
  type GridFrame,
} from '../raster/index.js';
import type { GridCounts } from './grid-counts.js';
import { coveredCells, type GroundNames, type GroundSources, openGroundSources } from './grid-sources.js';
import type { GroundPaths } from './grid-work.js';

/** Cells of a window, row-major: their places, and which of them are to be predicted. */
export interface GroundCells {
  readonly places: Places;
  readonly wanted: Uint8Array;
  readonly wantedCount: number;
}

/** Says for any window of a grid where its cells are, how high, and which are wanted. */
export interface Ground {
  readonly locate: FrameLocator;
  /** What is not wanted is counted by its reason; null where nothing is. */
  cells(window: CellWindow, counts: GridCounts): Promise<GroundCells | null>;
  close(): Promise<void>;
}

/** Throws what opening the files throws. */
export async function openGround(
  isoscape: Isoscape,
  frame: GridFrame,
  paths: GroundPaths,
  known: GroundNames | null,
): Promise<Ground> {
  const sources = await openGroundSources(paths, isoscape, known);
  const locate = frameLocator(frame);
  return {
    locate,
    close: () => sources.close(),
    async cells(window, counts) {
      const count = window.width * window.height;
      const wanted = new Uint8Array(count).fill(1);
      const places = createPlaces(count, sources.covariates.length);
      await leaveOutMasked(sources, frame, window, wanted, counts);
      if (!wanted.includes(1)) return null;
      placeCentres(locate, window, places, wanted, counts);
      await fillElevations(sources, frame, window, paths, places, wanted, counts);
      if (!wanted.includes(1)) return null;
      await fillCovariates(sources, frame, window, places, wanted, counts);
      const wantedCount = wanted.reduce((sum, each) => sum + each, 0);
      return wantedCount === 0 ? null : { places, wanted, wantedCount };
    },
  };
}

async function leaveOutMasked(
  sources: GroundSources,
  frame: GridFrame,
  window: CellWindow,
  wanted: Uint8Array,
  counts: GridCounts,
): Promise<void> {
  const covered = await coveredCells(sources, frame, window);
  if (covered === null) return;
  wanted.set(covered);
  counts.masked += wanted.length - wanted.reduce((sum, each) => sum + each, 0);
}

function placeCentres(
  locate: FrameLocator,
  window: CellWindow,
  places: Places,
  wanted: Uint8Array,
  counts: GridCounts,
): void {
  const { columns, rows } = cellCentres(window);
  locate(columns, rows, wanted.length, places.lonDeg, places.latDeg);
  for (let k = 0; k < wanted.length; k++) {
    if (wanted[k] === 0 || !Number.isNaN(places.lonDeg[k]!)) continue;
    wanted[k] = 0;
    counts.offEarth++;
  }
}

/** Sea stands at 0 m, exactly, where the grid of elevations knows that it is sea; unknown is not 0. */
async function fillElevations(
  { elevation }: GroundSources,
  frame: GridFrame,
  window: CellWindow,
  { seaAtZero, landOnly }: GroundPaths,
  places: Places,
  wanted: Uint8Array,
  counts: GridCounts,
): Promise<void> {
  const { elevationM, varianceM2, ground } = await elevation.sampleFrame(frame, window);
  for (let k = 0; k < wanted.length; k++) {
    if (wanted[k] === 0) continue;
    if (ground[k] === GROUND.land) {
      places.elevationM[k] = elevationM[k]!;
      places.elevationVarM2[k] = varianceM2[k]!;
    } else if (ground[k] === GROUND.sea && landOnly) {
      wanted[k] = 0;
      counts.sea++;
    } else if (ground[k] !== GROUND.sea || !seaAtZero) {
      wanted[k] = 0;
      counts.withoutElevation++;
    }
  }
}

async function fillCovariates(
  { covariates }: GroundSources,
  frame: GridFrame,
  window: CellWindow,
  places: Places,
  wanted: Uint8Array,
  counts: GridCounts,
): Promise<void> {
  for (const [c, { grid }] of covariates.entries()) {
    const { values } = await grid.sampleFrame(frame, window);
    const column = places.covariates[c]!;
    for (let k = 0; k < wanted.length; k++) {
      column[k] = values[k]!;
      if (wanted[k] === 0 || Number.isFinite(column[k])) continue;
      wanted[k] = 0;
      counts.withoutCovariate++;
    }
  }
}
