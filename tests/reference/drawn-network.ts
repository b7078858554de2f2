/** Invented networks drawn from a stated linear model of coregionalisation, for comparison with tests/reference/dense.ts. */
import { CholeskyDecomposition, Matrix } from 'ml-matrix';
import type { Network, PairCovariance } from '../../src/stations/network.js';
import * as dense from './dense.js';
import { seededGaussian, seededUniform } from './seeded.js';

export interface DrawnNetwork {
  readonly network: Network;
  readonly places: { lonDeg: number[]; latDeg: number[]; elevationM: number[] };
  /** True pairs at the places (micro-scale variation in), all δ18O then all δ2H. */
  readonly truth: number[];
}

/** Trend of the invented world: rows 1, sin(latitude), elevation in km, for δ18O and δ2H. */
const TREND = [
  [2, -12, -2.1],
  [20, -92, -15],
] as const;

/**
 * Stations and places over 20° × 15°, heights to 2,500 m; records of 12 to 120 months with sampling covariance S/m.
 */
export function drawNetwork(
  seed: number,
  stationCount: number,
  placeCount: number,
  components: readonly dense.Component[],
  within: PairCovariance,
): DrawnNetwork {
  const uniform = seededUniform(seed);
  const gaussian = seededGaussian(uniform);
  const count = stationCount + placeCount;
  const lonDeg = Array.from({ length: count }, () => -30 + 20 * uniform());
  const latDeg = Array.from({ length: count }, () => 35 + 15 * uniform());
  const elevationM = Array.from({ length: count }, () => 2500 * uniform() ** 2);
  const records = Array.from({ length: stationCount }, () => 12 + Math.floor(108 * uniform()));

  const points = dense.spherePoints(lonDeg, latDeg);
  const covariance = dense.pairCovariance(components, dense.straightDistances(points, points), true);
  const root = new CholeskyDecomposition(covariance).lowerTriangularMatrix;
  const field = root.mmul(Matrix.columnVector(Array.from({ length: 2 * count }, gaussian))).to1DArray();
  const trend = dense.zonalElevationTrend(latDeg, elevationM);
  const value = (isotope: 0 | 1, i: number) =>
    trend.getRow(i).reduce((sum, f, k) => sum + f * TREND[isotope][k]!, 0) + field[isotope * count + i]!;

  const sampling = dense.lowerRoot(within);
  const stations = records.map((m, i) => {
    const noise = sampling.mmul(Matrix.columnVector([gaussian(), gaussian()])).div(Math.sqrt(m));
    return {
      id: `N${String(i).padStart(3, '0')}`,
      name: `Invented ${i}`,
      lonDeg: lonDeg[i]!,
      latDeg: latDeg[i]!,
      elevationM: elevationM[i]!,
      d18O: value(0, i) + noise.get(0, 0),
      d2H: value(1, i) + noise.get(1, 0),
      effectiveRecords: m,
      recordCount: m,
      line: i + 2,
    };
  });
  const placeIndices = Array.from({ length: placeCount }, (_, k) => stationCount + k);
  return {
    network: {
      name: `invented network, seed ${seed}`,
      isotopes: 'both',
      season: { months: [1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12], label: '1-12' },
      years: null,
      stations,
      oneIsotopeStations: [],
      sampling: {
        kind: 'records',
        within,
        withinTotal: [2 * within[0], 2 * within[1], 2 * within[2]],
        pooledRecords: records.reduce((sum, m) => sum + m, 0),
        amountWeighted: true,
      },
      fromRecords: true,
      rowCount: records.reduce((sum, m) => sum + m, 0),
      stationsLeftOut: 0,
    },
    places: {
      lonDeg: placeIndices.map((i) => lonDeg[i]!),
      latDeg: placeIndices.map((i) => latDeg[i]!),
      elevationM: placeIndices.map((i) => elevationM[i]!),
    },
    truth: [...placeIndices.map((i) => value(0, i)), ...placeIndices.map((i) => value(1, i))],
  };
}
