import { RainprintError } from '../errors.js';
import { spatialBlocks } from '../geostat/blocks.js';
import { positionsOnSphereKm } from '../geostat/positions.js';
import type { Isoscape } from './isoscape.js';
import { createPlaces, createPredictions, type Predictions } from './places.js';
import { predictPlaces } from './predict.js';
import { refitOn } from './refit.js';
import type { FoldRecord } from './validation.js';

export interface BlockedPredictions {
  readonly predictions: Predictions;
  readonly folds: readonly FoldRecord[];
  readonly foldOfStation: Int32Array;
}

/**
 * Spatially blocked k-fold: each block of stations is predicted by an isoscape fitted anew (same family and terms)
 * to all others. Variances are those of the observed station mean: the site's, with the held-out station's own
 * known sampling covariance added. Where a fold cannot be refitted its stations stay NaN and its record says why.
 *
 * S and κ stay those of all stations, as do family and terms.
 */
export function predictBlocked(
  isoscape: Isoscape,
  foldCount: number,
  plugIn: boolean,
  onFold: (done: number) => void,
): BlockedPredictions {
  const { lonDeg, latDeg } = isoscape.stations;
  const count = lonDeg.length;
  const foldOfStation = spatialBlocks(positionsOnSphereKm(lonDeg, latDeg), foldCount);
  const predictions = createPredictions(count);
  const folds = Array.from({ length: foldCount }, (_, fold): FoldRecord => {
    const heldOut = stationsWhere(count, (i) => foldOfStation[i] === fold);
    const training = stationsWhere(count, (i) => foldOfStation[i] !== fold);
    const failure = codedFailure(() => predictHeldOut(isoscape, training, heldOut, plugIn, predictions));
    onFold(fold + 1);
    return { fold, heldOutCount: heldOut.length, trainingCount: training.length, failure };
  });
  return { predictions, folds, foldOfStation };
}

export function stationsWhere(count: number, test: (index: number) => boolean): number[] {
  return Array.from({ length: count }, (_, i) => i).filter(test);
}

function codedFailure(step: () => void): FoldRecord['failure'] {
  try {
    step();
    return null;
  } catch (error) {
    if (!(error instanceof RainprintError)) throw error;
    return { code: error.code, message: error.message };
  }
}

function predictHeldOut(
  isoscape: Isoscape,
  training: readonly number[],
  heldOut: readonly number[],
  plugIn: boolean,
  out: Predictions,
): void {
  const refitted = refitOn(isoscape, training);
  const places = createPlaces(heldOut.length, isoscape.covariates.length);
  heldOut.forEach((station, at) => {
    places.lonDeg[at] = isoscape.stations.lonDeg[station];
    places.latDeg[at] = isoscape.stations.latDeg[station];
    places.elevationM[at] = isoscape.stations.elevationM[station];
    places.covariates.forEach((column, k) => {
      column[at] = isoscape.stations.covariates[k][station];
    });
  });
  const there = createPredictions(heldOut.length);
  predictPlaces(refitted, places, there, { target: 'site', plugIn });
  heldOut.forEach((station, at) => {
    const [varD18O, cov, varD2H] = samplingCovariance(isoscape, station);
    out.d18O[station] = there.d18O[at];
    out.d2H[station] = there.d2H[at];
    out.varD18O[station] = there.varD18O[at] + varD18O;
    out.varD2H[station] = there.varD2H[at] + varD2H;
    out.cov[station] = there.cov[at] + cov;
  });
}

/**
 * Known sampling covariance κS/m_i of a station's mean, ‰²; zeros where sampling is unknown (then it sits in the
 * nugget). The fields hold κ/m_i, or κS/m_i for one isotope; a refit keeps κ.
 */
function samplingCovariance(isoscape: Isoscape, station: number): [number, number, number] {
  if (isoscape.isotopes === 'both') {
    const share = isoscape.along.samplingVariance[station];
    const [varD18O, cov, varD2H] = isoscape.whitening;
    return [varD18O * share, cov * share, varD2H * share];
  }
  const variance = isoscape.field.samplingVariance[station];
  return isoscape.isotopes === 'd18O' ? [variance, 0, 0] : [0, 0, variance];
}
