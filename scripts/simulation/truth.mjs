import { practicalRangeKm } from 'rainprint/geostat';
import { backTransform } from 'rainprint/isoscape';

/**
 * Truths of the simulation: along/across worlds that differ from network to network in everything a fit has to find.
 *
 * @typedef {import('rainprint/geostat').FieldParameters} FieldParameters
 * @typedef {readonly [number, number, number]} PairCovariance var δ18O, covariance, var δ2H, ‰²
 * @typedef {object} Truth
 * @property {import('rainprint/geostat').CovarianceFamily} family
 * @property {PairCovariance} within covariance of single records about their station's mean
 * @property {number} spatialSlope slope δ2H/δ18O of the along field's axis
 * @property {number} turnRad turn of the true axes under `within`
 * @property {FieldParameters} along whitened units
 * @property {FieldParameters} across
 * @property {readonly (readonly number[])[]} trend coefficients of 1, sin(latitude), elevation (km): δ18O, δ2H
 */

export const FAMILIES = ['exponential', 'matern32', 'matern52', 'spherical'];
/** Terms of every true trend, and of every fit that is told the trend. */
export const TERMS = ['zonal1', 'elevation'];
/** All worlds lie in this box of empty ocean. */
export const BOUNDS = { westDeg: -34, eastDeg: -10, southDeg: 34, northDeg: 52 };

const KM_PER_DEG = (Math.PI / 180) * 6371.0088;
const MIDDLE_LAT_RAD = (((BOUNDS.southDeg + BOUNDS.northDeg) / 2) * Math.PI) / 180;
const AREA_KM2 =
  (BOUNDS.eastDeg - BOUNDS.westDeg) *
  (BOUNDS.northDeg - BOUNDS.southDeg) *
  KM_PER_DEG ** 2 *
  Math.cos(MIDDLE_LAT_RAD);

/** Spatial standard deviation the along field alone gives δ18O, ‰. */
const ALONG_SD_D18O = [0.6, 1.8];
/** Variance of the across field over that of the along field, in whitened units. */
const ACROSS_SHARE = [0.05, 0.8];
/** Distances of 5 % correlation run from one mean spacing (next to no neighbours) to beyond the whole network. */
const PRACTICAL_RANGE_SPACINGS = [1, 8];
/** Share of the networks whose field has no micro-scale variation at all. */
const NO_NUGGET = 1 / 3;

/** @returns {Truth} */
export function drawTruth(random, stationCount) {
  const family = random.pick(FAMILIES);
  const sdD18O = random.between(2, 3.5);
  const withinSlope = random.between(7.2, 7.6);
  const correlation = random.between(0.96, 0.99);
  const sdD2H = (withinSlope * sdD18O) / correlation;
  const within = [sdD18O ** 2, withinSlope * sdD18O ** 2, sdD2H ** 2];
  const spatialSlope = random.between(5.5, 8);
  // The along axis is (l11 cos φ, l21 cos φ + l22 sin φ): its slope is l21/l11 + (l22/l11) tan φ, and l21/l11 is
  // the within-station slope.
  const l22 = sdD2H * Math.sqrt(1 - correlation ** 2);
  const turnRad = Math.atan(((spatialSlope - withinSlope) * sdD18O) / l22);
  const [t11] = backTransform(within, turnRad);
  const spacingKm = Math.sqrt(AREA_KM2 / stationCount);
  const alongTotal = (random.between(...ALONG_SD_D18O) / t11) ** 2;
  const acrossTotal = alongTotal * Math.exp(random.between(...ACROSS_SHARE.map(Math.log)));
  return {
    family,
    within,
    spatialSlope,
    turnRad,
    along: drawField(random, family, alongTotal, spacingKm),
    across: drawField(random, family, acrossTotal, spacingKm),
    trend: drawTrend(random, spatialSlope),
  };
}

function drawField(random, family, total, spacingKm) {
  const [low, high] = PRACTICAL_RANGE_SPACINGS.map(Math.log);
  const practicalKm = spacingKm * Math.exp(random.between(low, high));
  const share = random.chance(NO_NUGGET) ? 0 : random.between(0.05, 0.4);
  return {
    rangeKm: practicalKm / practicalRangeKm(family, 1),
    sill: total * (1 - share),
    nugget: total * share,
  };
}

/** About −2 ‰ δ18O a km and −0.25 ‰ a degree, δ2H along the spatial slope with a d-excess effect of its own. */
function drawTrend(random, spatialSlope) {
  const d18O = [random.between(0, 6), random.between(-22, -10), random.between(-2.8, -1.2)];
  const d2H = [
    spatialSlope * d18O[0] + random.between(5, 15),
    spatialSlope * d18O[1] + random.between(-8, 8),
    spatialSlope * d18O[2] + random.between(-2, 2),
  ];
  return [d18O, d2H];
}
