import { CholeskyDecomposition, Matrix } from 'ml-matrix';
import { correlation, distanceKm, positionsOnSphereKm } from 'rainprint/geostat';
import { backTransform, createPlaces } from 'rainprint/isoscape';
import { effectiveRecords, poolWithin, WHOLE_YEAR, WithinSums } from 'rainprint/stations';
import { BOUNDS } from './truth.mjs';

/**
 * One network of a truth: stations with monthly records, and sites elsewhere whose true pairs are drawn jointly with
 * the stations' own.
 *
 * @typedef {object} Drawn
 * @property {import('rainprint/stations').Network} network S pooled from its own records
 * @property {import('rainprint/isoscape').Places} sites
 * @property {readonly Float64Array[]} siteTruth δ18O and δ2H of the sites, micro-scale variation in
 */

/** Whole years of monthly records a station has. */
const YEARS = [1, 10];
/** Shape of the monthly amounts' gamma distribution: coefficient of variation 0.71. */
const AMOUNT_SHAPE = 2;
const MEAN_AMOUNT_MM = 80;
const HIGHEST_M = 2500;

/** @returns {Drawn} */
export function drawNetwork(random, truth, stationCount, siteCount, name) {
  const count = stationCount + siteCount;
  const column = (draw) => Float64Array.from({ length: count }, draw);
  const lonDeg = column(() => random.between(BOUNDS.westDeg, BOUNDS.eastDeg));
  const latDeg = column(() => random.between(BOUNDS.southDeg, BOUNDS.northDeg));
  const elevationM = column(() => HIGHEST_M * random.uniform() ** 2);
  const [d18O, d2H] = drawPairs(random, truth, lonDeg, latDeg, elevationM);
  const records = Array.from({ length: stationCount }, (_, i) =>
    drawRecords(random, truth.within, d18O[i], d2H[i]),
  );
  const stations = records.map((sums, i) => {
    const total = sums.total();
    return {
      id: `S${String(i + 1).padStart(3, '0')}`,
      name: `Invented ${i + 1}`,
      lonDeg: lonDeg[i],
      latDeg: latDeg[i],
      elevationM: elevationM[i],
      d18O: total.meanD18O,
      d2H: total.meanD2H,
      effectiveRecords: effectiveRecords(total),
      recordCount: total.count,
      line: i + 2,
    };
  });
  const sites = createPlaces(siteCount);
  sites.lonDeg.set(lonDeg.subarray(stationCount));
  sites.latDeg.set(latDeg.subarray(stationCount));
  sites.elevationM.set(elevationM.subarray(stationCount));
  return {
    network: asNetwork(name, stations, poolWithin(records)),
    sites,
    siteTruth: [d18O.subarray(stationCount), d2H.subarray(stationCount)],
  };
}

/** True pairs at every place: trend plus T·(along, across), each field with its own micro-scale variation. */
function drawPairs(random, truth, lonDeg, latDeg, elevationM) {
  const positions = positionsOnSphereKm(lonDeg, latDeg);
  const along = drawField(random, truth.family, truth.along, positions);
  const across = drawField(random, truth.family, truth.across, positions);
  const [t11, t12, t21, t22] = backTransform(truth.within, truth.turnRad);
  const trendOf = (coefficients, i) =>
    coefficients[0] +
    coefficients[1] * Math.sin((latDeg[i] * Math.PI) / 180) +
    (coefficients[2] * elevationM[i]) / 1000;
  return [
    lonDeg.map((_, i) => trendOf(truth.trend[0], i) + t11 * along[i] + t12 * across[i]),
    lonDeg.map((_, i) => trendOf(truth.trend[1], i) + t21 * along[i] + t22 * across[i]),
  ];
}

/** Signal and micro-scale variation of one field, one value a position. */
export function drawField(random, family, { rangeKm, sill, nugget }, positions) {
  const count = positions.length / 3;
  const covariance = Matrix.zeros(count, count);
  for (let i = 0; i < count; i++) {
    for (let j = 0; j < i; j++) {
      const h = distanceKm(positions, i, positions, j, 'euclidean');
      covariance.set(i, j, sill * correlation(family, h / rangeKm));
      covariance.set(j, i, covariance.get(i, j));
    }
    covariance.set(i, i, sill + nugget);
  }
  const factor = new CholeskyDecomposition(covariance);
  if (!factor.isPositiveDefinite()) throw new Error('the true covariance is singular in double precision');
  const normal = Matrix.columnVector(Array.from({ length: count }, random.normal));
  return factor.lowerTriangularMatrix.mmul(normal).to1DArray();
}

/** Monthly records about the station's own mean: independent, of covariance `within`, weighted by amount. */
function drawRecords(random, [varO, cov, varH], meanD18O, meanD2H) {
  const [l11, l21] = [Math.sqrt(varO), cov / Math.sqrt(varO)];
  const l22 = Math.sqrt(varH - l21 ** 2);
  const sums = new WithinSums();
  const months = 12 * (YEARS[0] + random.integerBelow(YEARS[1] - YEARS[0] + 1));
  for (let k = 0; k < months; k++) {
    const [a, b] = [random.normal(), random.normal()];
    const amountMm = (MEAN_AMOUNT_MM * random.gamma(AMOUNT_SHAPE)) / AMOUNT_SHAPE;
    sums.add(1 + (k % 12), meanD18O + l11 * a, meanD2H + l21 * a + l22 * b, amountMm);
  }
  return sums;
}

export function asNetwork(name, stations, pooled) {
  const { within, withinTotal, recordCount } = pooled;
  return {
    name,
    isotopes: 'both',
    season: WHOLE_YEAR,
    years: null,
    stations,
    oneIsotopeStations: [],
    sampling: { kind: 'records', within, withinTotal, pooledRecords: recordCount, amountWeighted: true },
    fromRecords: true,
    rowCount: recordCount,
    stationsLeftOut: 0,
  };
}

/** The same network with the true S in place of the pooled one. */
export function withTrueWithin(network, within) {
  return { ...network, sampling: { ...network.sampling, within, withinTotal: within } };
}
