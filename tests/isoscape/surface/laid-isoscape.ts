/** Invented isoscapes whose parameters are set by hand, to be laid over grids, and what a surface says of them. */

import type { CovarianceFamily } from '../../../src/geostat/index.js';
import {
  createPlaces,
  createPredictions,
  createSurface,
  type Isoscape,
  type Places,
  type Predictions,
  predictPlaces,
  type Surface,
  type SurfaceGrid,
  type SurfaceOptions,
  type SurfaceWindow,
} from '../../../src/isoscape/index.js';
import type { FittedField } from '../../../src/isoscape/isoscape.js';
import { seededUniform } from '../../reference/seeded.js';

export interface Recipe {
  readonly seed: number;
  readonly count: number;
  readonly family: CovarianceFamily;
  /** Ranges of along and across, km. */
  readonly rangeKm: readonly [number, number];
  readonly nugget?: number;
  readonly clustered?: boolean;
  readonly isotope?: 'd18O';
  readonly covariate?: boolean;
  readonly frame?: readonly [west: number, south: number, east: number, north: number];
}

const TERMS = ['zonal1', 'elevation'];

export function laidIsoscape(recipe: Recipe): Isoscape {
  const { seed, count, family, rangeKm, nugget = 0.2, isotope } = recipe;
  const uniform = seededUniform(seed);
  const gaussian = () => Math.sqrt(-2 * Math.log(1 - uniform())) * Math.cos(2 * Math.PI * uniform());
  const { lonDeg, latDeg } = drawStations(recipe, uniform, gaussian);
  const column = (draw: () => number) => Float64Array.from({ length: count }, draw);
  const elevationM = column(() => 700 * Math.abs(gaussian()));
  const covariates = recipe.covariate ? [column(gaussian)] : [];
  const field = (k: 0 | 1): FittedField => {
    const base = { rangeKm: rangeKm[k], sill: k === 0 ? 2 : 0.8, nugget: nugget * (k === 0 ? 1 : 0.4) };
    const values = Float64Array.from(lonDeg, (lon, i) => {
      const smooth = 2 * Math.sin(lon / 7 + k) + 1.4 * Math.cos((latDeg[i]! / 5) * (k + 1));
      return smooth + 0.5 * gaussian() - elevationM[i]! / 1500 - 3 * (1 - k);
    });
    return {
      name: isotope ?? (k === 0 ? 'along' : 'across'),
      values,
      samplingVariance: new Float64Array(count).fill(nugget === 0 ? 0 : 0.03),
      parameters: base,
      fixed: [],
      logLikelihood: 0,
      coefficients: new Float64Array(TERMS.length + 1),
      coefficientCovariance: new Float64Array((TERMS.length + 1) ** 2),
      nodes: spreadNodes(base),
      boundsReached: [],
      longRangeLimit: false,
    };
  };
  const common = {
    id: 'invented',
    networkName: 'invented',
    stations: {
      id: Array.from({ length: count }, (_, i) => `station ${i}`),
      name: [],
      lonDeg,
      latDeg,
      elevationM,
      d18O: column(() => 0),
      d2H: column(() => 0),
      effectiveRecords: column(() => 40),
      covariates,
    },
    family,
    likelihood: { method: 'exact' },
    terms: recipe.covariate ? [...TERMS, 'wetness'] : TERMS,
    covariates: recipe.covariate ? [{ name: 'wetness', source: 'invented', centre: 0.1, scale: 1.2 }] : [],
  };
  const fields = isotope
    ? { isotopes: isotope, field: field(0) }
    : {
        isotopes: 'both',
        whitening: [0.3, 2.2, 17],
        turnRad: 0.1,
        turnVarianceRad2: 0.0009,
        along: field(0),
        across: field(1),
      };
  return { ...common, ...fields } as unknown as Isoscape;
}

function drawStations({ count, clustered, frame }: Recipe, uniform: () => number, gaussian: () => number) {
  const [west, south, east, north] = frame ?? [-20, 30, 15, 58];
  const lonDeg = new Float64Array(count);
  const latDeg = new Float64Array(count);
  const centres = Array.from({ length: 3 }, () => [
    west + (east - west) * uniform(),
    south + (north - south) * uniform(),
  ]);
  for (let i = 0; i < count; i++) {
    const centre = clustered && uniform() < 0.85 ? centres[Math.floor(3 * uniform())]! : null;
    lonDeg[i] = centre === null ? west + (east - west) * uniform() : centre[0]! + 0.8 * gaussian();
    latDeg[i] = centre === null ? south + (north - south) * uniform() : centre[1]! + 0.5 * gaussian();
  }
  return { lonDeg, latDeg };
}

/** Nine nodes about the parameters, as an average has them. */
function spreadNodes({ rangeKm, sill, nugget }: { rangeKm: number; sill: number; nugget: number }) {
  return [-1, 0, 1].flatMap((a) =>
    [-1, 0, 1].map((b) => ({
      rangeKm: rangeKm * Math.exp(0.3 * a),
      sill: sill * Math.exp(0.25 * a + 0.1 * b),
      nugget: nugget * Math.exp(0.5 * b),
      weight: ((2 - Math.abs(a)) * (2 - Math.abs(b))) / 16,
    })),
  );
}

/** A north-up grid of degrees. */
export function degreeGrid(
  westDeg: number,
  northDeg: number,
  cellDeg: number,
  width: number,
  height: number,
) {
  const locate: SurfaceGrid['locate'] = (columns, rows, count, lonDeg, latDeg) => {
    for (let k = 0; k < count; k++) {
      lonDeg[k] = westDeg + columns[k]! * cellDeg;
      latDeg[k] = northDeg - rows[k]! * cellDeg;
    }
  };
  return { width, height, locate };
}

export function wholeWindow({ width, height }: SurfaceGrid): SurfaceWindow {
  return { firstColumn: 0, firstRow: 0, width, height };
}

/** Cell centres of a window with rough elevations that depend on the cell only. */
export function cellsOf(grid: SurfaceGrid, window: SurfaceWindow, covariateCount = 0): Places {
  const count = window.width * window.height;
  const places = createPlaces(count, covariateCount);
  const columns = new Float64Array(count);
  const rows = new Float64Array(count);
  for (let k = 0; k < count; k++) {
    columns[k] = window.firstColumn + (k % window.width) + 0.5;
    rows[k] = window.firstRow + Math.floor(k / window.width) + 0.5;
    const rough = seededUniform(1 + 7919 * Math.floor(rows[k]!) + Math.floor(columns[k]!));
    places.elevationM[k] = 2500 * rough() ** 3;
    places.elevationVarM2[k] = 400 * rough();
    for (const column of places.covariates) column[k] = 2 * rough() - 1;
  }
  grid.locate(columns, rows, count, places.lonDeg, places.latDeg);
  return places;
}

export function predictAll(surface: Surface, window: SurfaceWindow, places: Places): Predictions {
  const out = createPredictions(places.count);
  surface.predictWindow(window, places, new Uint8Array(places.count).fill(1), out);
  return out;
}

/** Largest error of a surface against every cell predicted by itself, in tolerances. */
export function worstError(
  isoscape: Isoscape,
  grid: SurfaceGrid,
  options: Partial<SurfaceOptions> = {},
): number {
  const asked: SurfaceOptions = { plugIn: false, target: 'site', tolerance: 0.005, exact: false, ...options };
  const window = wholeWindow(grid);
  const places = cellsOf(grid, window, isoscape.covariates.length);
  const got = predictAll(createSurface(isoscape, grid, asked), window, places);
  const exact = createPredictions(places.count);
  predictPlaces(isoscape, places, exact, asked);
  return largestShare(got, exact, asked.tolerance);
}

/** Errors of δ18O, δ2H, d-excess and their standard errors in tolerances, written apart from the code it checks. */
function largestShare(a: Predictions, b: Predictions, tolerance: number): number {
  const values = (p: Predictions, k: number) => {
    const dVariance = 64 * p.varD18O[k]! - 16 * p.cov[k]! + p.varD2H[k]!;
    return [
      p.d18O[k]! / tolerance,
      Math.sqrt(p.varD18O[k]!) / tolerance,
      p.d2H[k]! / (8 * tolerance),
      Math.sqrt(p.varD2H[k]!) / (8 * tolerance),
      (p.d2H[k]! - 8 * p.d18O[k]!) / (8 * tolerance),
      Math.sqrt(Math.max(0, dVariance)) / (8 * tolerance),
    ];
  };
  let worst = 0;
  for (let k = 0; k < a.d18O.length; k++) {
    const exact = values(b, k);
    values(a, k).forEach((value, i) => {
      const apart = Math.abs(value - exact[i]!);
      if (Number.isNaN(exact[i]!) ? !Number.isNaN(value) : !(apart <= worst)) worst = Math.max(worst, apart);
    });
  }
  return worst;
}
