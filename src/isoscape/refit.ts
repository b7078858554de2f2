import { createGeometry, type FixedParameters, fitField, positionsOnSphereKm } from '../geostat/index.js';
import { normaliseTurn, turn, whiten } from './axes.js';
import { contentHash } from './canonical-json.js';
import { finishField } from './fitted-field.js';
import type { FittedField, Isoscape } from './isoscape.js';
import { conditioningFor } from './large-network.js';
import { turnVariance } from './pair-fit.js';
import { searchTurn } from './pair-search.js';
import { selectStations } from './station-columns.js';
import { supportLimits } from './support.js';
import { trendRows } from './trend.js';

/**
 * The same isoscape from a subset of its stations, for cross-validation: family, terms, whitening, sampling scale
 * and fixed parameters stay; covariance parameters, turn and nodes are estimated anew.
 * @throws as fitIsoscape
 */
export function refitOn(isoscape: Isoscape, stationIndices: ArrayLike<number>): Isoscape {
  const stations = selectStations(isoscape.stations, stationIndices);
  const positionsKm = positionsOnSphereKm(stations.lonDeg, stations.latDeg);
  const geometry = createGeometry(
    positionsKm,
    trendRows(isoscape, stations),
    isoscape.terms.length + 1,
    'euclidean',
    conditioningFor(isoscape.likelihood, positionsKm),
  );
  const pick = (values: Float64Array) => Float64Array.from(Array.from(stationIndices), (i) => values[i]);
  const id = contentHash({ from: isoscape.id, stations: stations.id });
  const { family } = isoscape;
  if (isoscape.isotopes !== 'both') {
    const { field: old } = isoscape;
    const values = pick(old.values);
    const errorVariance = pick(old.samplingVariance);
    const fit = fitField(geometry, values, errorVariance, family, {
      fixed: heldParameters(old),
      starts: [old.parameters],
    });
    const field = finishField(old.name, geometry, family, values, errorVariance, fit);
    return { ...isoscape, id, stations, field, support: supportLimits(stations, family, [field]) };
  }
  const { along: oldAlong, across: oldAcross, whitening } = isoscape;
  const [y1, y2] = whiten(whitening, stations.d18O, stations.d2H);
  const errorVariance = pick(oldAlong.samplingVariance);
  const fix = {
    along: heldParameters(oldAlong),
    across: heldParameters(oldAcross),
    ...(isoscape.turnFixed ? { turnDeg: (isoscape.turnRad * 180) / Math.PI } : {}),
  };
  const { fit, profile } = searchTurn({ y1, y2, errorVariance, fix }, geometry, family, 'restricted', {
    turnRad: isoscape.turnRad,
    parameters: { along: oldAlong.parameters, across: oldAcross.parameters },
  });
  const turnRad = normaliseTurn(fit.turnRad);
  const u1 = new Float64Array(y1.length);
  const u2 = new Float64Array(y1.length);
  turn(y1, y2, turnRad, u1, u2);
  const along = finishField('along', geometry, family, u1, errorVariance, fit.along);
  const across = finishField('across', geometry, family, u2, errorVariance, fit.across);
  return {
    ...isoscape,
    id,
    stations,
    turnRad,
    turnVarianceRad2: isoscape.turnFixed ? 0 : turnVariance(profile, fit),
    along,
    across,
    support: supportLimits(stations, family, [along, across]),
  };
}

/** The parameters the user fixed in the fit, which a refit keeps. */
function heldParameters({ fixed, parameters }: FittedField): FixedParameters {
  return {
    ...(fixed.includes('range_km') ? { rangeKm: parameters.rangeKm } : {}),
    ...(fixed.includes('sill') ? { sill: parameters.sill } : {}),
    ...(fixed.includes('nugget') ? { nugget: parameters.nugget } : {}),
  };
}
