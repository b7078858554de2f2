import { FieldSystem, positionsOnSphereKm } from '../geostat/index.js';
import { backTransform } from './axes.js';
import { isoscapeGeometry } from './field-average.js';
import type { FittedField, Isoscape } from './isoscape.js';
import { requireFactor } from './large-network.js';
import { type Places, requireCovariates } from './places.js';
import { trendRows } from './trend.js';

/** What one station contributes to a prediction. */
export interface StationWeight {
  readonly stationId: string;
  /** Kriging weights in the fields (one entry for a one-isotope isoscape); a field's weights sum to 1. */
  readonly weights: Readonly<Record<string, number>>;
}

/** A prediction taken apart at the fitted parameters: trend and residual parts, ‰, and the heaviest stations. */
export interface Explanation {
  readonly d18O: { readonly trend: number; readonly residual: number } | null;
  readonly d2H: { readonly trend: number; readonly residual: number } | null;
  readonly heaviest: readonly StationWeight[];
}

const STATIONS_SHOWN = 10;

/**
 * Takes predictions apart, at the optimum of the parameters (plug-in) and from all stations, for `sites --explain`.
 * @throws NETWORK_TOO_LARGE
 */
export function explainPlaces(isoscape: Isoscape, places: Places): Explanation[] {
  requireCovariates(isoscape, places);
  requireFactor(isoscape.stations.id.length, 'taking a prediction apart');
  const geometry = isoscapeGeometry(isoscape);
  const fields = isoscape.isotopes === 'both' ? [isoscape.along, isoscape.across] : [isoscape.field];
  const systems = fields.map((field) => {
    const system = new FieldSystem(geometry, isoscape.family, field.parameters, field.samplingVariance);
    return { field, system, data: system.solveData(field.values) };
  });
  const positions = positionsOnSphereKm(places.lonDeg, places.latDeg);
  const rows = trendRows(isoscape, places, places.count);
  const p = isoscape.terms.length + 1;
  return Array.from({ length: places.count }, (_, j) => {
    const row = rows.subarray(j * p, (j + 1) * p);
    const parts = systems.map(({ field, system, data }) => {
      const weights = system.krigingWeights(positions.subarray(3 * j, 3 * j + 3), row);
      const total = weights.reduce((sum, weight, i) => sum + weight * field.values[i], 0);
      const trend = row.reduce((sum, value, c) => sum + value * data.coefficients[c], 0);
      return { weights, trend, residual: total - trend };
    });
    return { ...isotopeParts(isoscape, parts), heaviest: heaviestStations(isoscape, fields, parts) };
  });
}

interface FieldPart {
  readonly weights: Float64Array;
  readonly trend: number;
  readonly residual: number;
}

function isotopeParts(isoscape: Isoscape, parts: readonly FieldPart[]): Pick<Explanation, 'd18O' | 'd2H'> {
  const [one, two] = parts as [FieldPart, FieldPart | undefined];
  if (isoscape.isotopes !== 'both' || two === undefined) {
    const part = { trend: one.trend, residual: one.residual };
    return {
      d18O: isoscape.isotopes === 'd18O' ? part : null,
      d2H: isoscape.isotopes === 'd2H' ? part : null,
    };
  }
  const t = backTransform(isoscape.whitening, isoscape.turnRad);
  const mix = (a: number, b: number) => ({
    trend: a * one.trend + b * two.trend,
    residual: a * one.residual + b * two.residual,
  });
  return { d18O: mix(t[0], t[1]), d2H: mix(t[2], t[3]) };
}

function heaviestStations(
  isoscape: Isoscape,
  fields: readonly FittedField[],
  parts: readonly FieldPart[],
): StationWeight[] {
  const ids = isoscape.stations.id;
  const size = (i: number) => parts.reduce((sum, part) => sum + Math.abs(part.weights[i]), 0);
  return Array.from(ids.keys())
    .sort((a, b) => size(b) - size(a) || a - b)
    .slice(0, STATIONS_SHOWN)
    .map((i) => ({
      stationId: ids[i],
      weights: Object.fromEntries(fields.map((field, k) => [field.name, parts[k].weights[i]])),
    }));
}
