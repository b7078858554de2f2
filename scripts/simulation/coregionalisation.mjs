import { CholeskyDecomposition, Matrix } from 'ml-matrix';
import { chordKm, correlation } from 'rainprint/geostat';
import { createPlaces } from 'rainprint/isoscape';
import { asNetwork } from './network.mjs';
import { pairCovariance } from './stacked.mjs';
import { BOUNDS } from './truth.mjs';

/**
 * Truths that are not of the along/across kind, apart from the first, which is a control: under one structure with
 * its nugget in proportion nothing is left out, and the loss must be zero to rounding.
 */
export const KINDS = {
  intrinsic: (random) => {
    const B = covarianceOf(random.between(0.8, 2.5), random.between(5.5, 8), random.between(0.93, 0.985));
    const share = random.between(0, 0.3);
    return {
      structures: [{ B, rangeKm: random.between(150, 700) }],
      nugget: B.map((b) => b * share),
    };
  },
  /** A long and a short structure of different slopes, and a nugget of a third: no turn makes all three diagonal. */
  'two structures': (random) => ({
    structures: [
      {
        B: covarianceOf(random.between(0.8, 2.5), random.between(7, 8.2), random.between(0.93, 0.985)),
        rangeKm: random.between(400, 900),
      },
      {
        B: covarianceOf(random.between(0.3, 1), random.between(5, 6.5), random.between(0.8, 0.95)),
        rangeKm: random.between(100, 250),
      },
    ],
    nugget: covarianceOf(random.between(0.02, 0.2), random.between(6, 8), random.between(0.6, 0.9)),
  }),
  /** One field along a shallow line and one in δ2H alone: axes that no turn of the whitened plane brings together. */
  'own axes': (random) => {
    const slope = random.between(5.5, 7);
    const along = random.between(0.8, 2.5);
    return {
      structures: [
        { B: [along, along * slope, along * slope ** 2], rangeKm: random.between(300, 900) },
        { B: [0, 0, random.between(2, 12)], rangeKm: random.between(100, 600) },
      ],
      nugget: covarianceOf(random.between(0.02, 0.2), slope, random.between(0.8, 0.95)),
    };
  },
  /** Both isotopes' own structures, strongly correlated within each but of exchanged strength. */
  'exchanged strength': (random) => ({
    structures: [
      { B: covarianceOf(random.between(1, 2), 5.5, 0.9), rangeKm: random.between(150, 300) },
      { B: covarianceOf(random.between(0.4, 1), 8, 0.97), rangeKm: random.between(500, 1200) },
    ],
    nugget: [random.between(0, 0.1), 0, random.between(0, 6)],
  }),
};

/** Covariance with a variance of δ18O, a regression slope of δ2H on it and a correlation. */
function covarianceOf(varD18O, slope, rho) {
  return [varD18O, slope * varD18O, (slope / rho) ** 2 * varD18O];
}

/** Sampling slope of single records, other than that of space. */
const WITHIN_SLOPE = 7.4;
const FAMILIES = ['exponential', 'matern32', 'spherical'];
const TREND = [
  [3, -15, -2],
  [30, -105, -13],
];
const FEWEST_RECORDS = 12;
const MOST_RECORDS = 120;

/** A truth of one kind, and stations and places drawn from it. */
export function drawCoregionalised(random, kind, stationCount, placeCount) {
  const family = random.pick(FAMILIES);
  const sd = random.between(2, 3.5);
  const model = {
    ...KINDS[kind](random),
    correlation: (t) => correlation(family, t),
    within: covarianceOf(sd ** 2, WITHIN_SLOPE, random.between(0.96, 0.99)),
  };
  const count = stationCount + placeCount;
  const lonDeg = Array.from({ length: count }, () => random.between(BOUNDS.westDeg, BOUNDS.eastDeg));
  const latDeg = Array.from({ length: count }, () => random.between(BOUNDS.southDeg, BOUNDS.northDeg));
  const elevationM = Array.from({ length: count }, () => 2500 * random.uniform() ** 2);
  const records = Array.from(
    { length: stationCount },
    () => FEWEST_RECORDS + random.integerBelow(MOST_RECORDS - FEWEST_RECORDS + 1),
  );
  const distances = Matrix.zeros(count, count);
  for (let i = 0; i < count; i++) {
    for (let j = 0; j < count; j++) distances.set(i, j, chordKm(lonDeg[i], latDeg[i], lonDeg[j], latDeg[j]));
  }
  const trend = new Matrix(
    latDeg.map((lat, i) => [1, Math.sin((lat * Math.PI) / 180), elevationM[i] / 1000]),
  );
  const values = drawPairs(random, model, distances, trend);
  const observed = values.map((column) => column.slice(0, stationCount));
  addSamplingErrors(random, model.within, records, observed);
  return {
    family,
    model,
    distances,
    trend,
    records,
    observed,
    network: networkOf(model.within, { lonDeg, latDeg, elevationM, records, observed }),
    places: placesOf(lonDeg, latDeg, elevationM, stationCount),
    truth: values.map((column) => Float64Array.from(column.slice(stationCount))),
  };
}

function drawPairs(random, model, distances, trend) {
  const count = distances.rows;
  const covariance = pairCovariance(model, distances, true);
  // Structures of rank one leave the smallest eigenvalues at rounding.
  for (let i = 0; i < 2 * count; i++) covariance.data[i][i] *= 1 + 1e-12;
  const factor = new CholeskyDecomposition(covariance);
  if (!factor.isPositiveDefinite()) throw new Error('the true covariance is singular in double precision');
  const normal = Matrix.columnVector(Array.from({ length: 2 * count }, random.normal));
  const noise = factor.lowerTriangularMatrix.mmul(normal).to1DArray();
  return TREND.map((coefficients, isotope) =>
    trend
      .mmul(Matrix.columnVector(coefficients))
      .to1DArray()
      .map((value, i) => value + noise[isotope * count + i]),
  );
}

function addSamplingErrors(random, [varO, cov, varH], records, [d18O, d2H]) {
  const [l11, l21] = [Math.sqrt(varO), cov / Math.sqrt(varO)];
  const l22 = Math.sqrt(varH - l21 ** 2);
  records.forEach((m, i) => {
    const [a, b] = [random.normal() / Math.sqrt(m), random.normal() / Math.sqrt(m)];
    d18O[i] += l11 * a;
    d2H[i] += l21 * a + l22 * b;
  });
}

function networkOf(within, { lonDeg, latDeg, elevationM, records, observed }) {
  const stations = records.map((m, i) => ({
    id: `S${String(i + 1).padStart(3, '0')}`,
    name: `Invented ${i + 1}`,
    lonDeg: lonDeg[i],
    latDeg: latDeg[i],
    elevationM: elevationM[i],
    d18O: observed[0][i],
    d2H: observed[1][i],
    effectiveRecords: m,
    recordCount: m,
    line: i + 2,
  }));
  const recordCount = records.reduce((sum, m) => sum + m, 0);
  return asNetwork('invented network', stations, { within, withinTotal: within, recordCount });
}

function placesOf(lonDeg, latDeg, elevationM, first) {
  const places = createPlaces(lonDeg.length - first);
  places.lonDeg.set(lonDeg.slice(first));
  places.latDeg.set(latDeg.slice(first));
  places.elevationM.set(elevationM.slice(first));
  return places;
}
