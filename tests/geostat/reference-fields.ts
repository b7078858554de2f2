/** The reference data as geometries of src/geostat: Colorado on chords, meuse in the plane (third coordinate 0). */
import {
  type CovarianceFamily,
  createBlupWorkspace,
  createGeometry,
  type FieldGeometry,
  type FieldParameters,
  FieldSystem,
  positionsOnSphereKm,
  predictField,
} from '../../src/geostat/index.js';
import { trendRows } from '../../src/isoscape/trend.js';
import { readColorado, readMeuse } from '../reference/read.js';

export interface ReferenceField {
  readonly geometry: FieldGeometry;
  readonly placesKm: Float64Array;
  /** Trend rows of the places, count × p. */
  readonly placeTrend: Float64Array;
  readonly placeCount: number;
}

type Points = { lonDeg: number[]; latDeg: number[]; elevationM: number[] };

/** Positions and trend 1, P1(sin latitude), elevation in km. */
export function onSphere(points: Points): { positionsKm: Float64Array; trend: Float64Array } {
  const [lon, lat, elevation] = [points.lonDeg, points.latDeg, points.elevationM].map((c) =>
    Float64Array.from(c),
  ) as [Float64Array, Float64Array, Float64Array];
  return {
    positionsKm: positionsOnSphereKm(lon, lat),
    trend: trendRows(
      { terms: ['zonal1', 'elevation'], covariates: [] },
      { latDeg: lat, elevationM: elevation, covariates: [] },
    ),
  };
}

export function coloradoField(): ReferenceField {
  const { stations, places } = readColorado();
  const at = onSphere(places);
  const { positionsKm, trend } = onSphere(stations);
  return {
    geometry: createGeometry(positionsKm, trend, 3),
    placesKm: at.positionsKm,
    placeTrend: at.trend,
    placeCount: places.lonDeg.length,
  };
}

/** Trend 1 and √dist, or 1 alone. */
export function meuseField(constantTrend = false): ReferenceField {
  const { stations, places } = readMeuse();
  const flat = (p: { xKm: number[]; yKm: number[] }) =>
    Float64Array.from(p.xKm.flatMap((x, i) => [x, p.yKm[i]!, 0]));
  const trend = (p: { sqrtDist: number[] }) =>
    Float64Array.from(p.sqrtDist.flatMap((d) => (constantTrend ? [1] : [1, d])));
  return {
    geometry: createGeometry(flat(stations), trend(stations), constantTrend ? 1 : 2),
    placesKm: flat(places),
    placeTrend: trend(places),
    placeCount: places.xKm.length,
  };
}

/** Mean and signal variance at the places of a reference field. */
export function predictAt(
  field: ReferenceField,
  family: CovarianceFamily,
  parameters: FieldParameters,
  errorVariance: Float64Array,
  values: Float64Array,
): { mean: Float64Array; variance: Float64Array } {
  const { geometry, placesKm, placeTrend, placeCount } = field;
  const system = new FieldSystem(geometry, family, parameters, errorVariance);
  const mean = new Float64Array(placeCount);
  const variance = new Float64Array(placeCount);
  const workspace = createBlupWorkspace(geometry.n, geometry.p);
  const data = [system.solveData(values)];
  predictField(system, placesKm, placeTrend, placeCount, data, [mean], variance, workspace);
  return { mean, variance };
}
