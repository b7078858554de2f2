import { practicalRangeKm } from '../../geostat/index.js';
import { coverageAt, type Scores } from '../../geostat/scores.js';
import {
  type AxesSummary,
  axesSummary,
  centreLatitudeDeg,
  covariateEffects,
  elevationEffect,
  type IsotopeEffects,
  latitudeEffect,
} from '../../isoscape/effects.js';
import type { FittedField, Isoscape } from '../../isoscape/index.js';
import type { SchemeResult } from '../../isoscape/validation.js';

export const SUMMARY_LEVEL = 0.9;

export interface FieldSummary {
  readonly name: string;
  readonly rangeKm: number;
  /** Distance at which the correlation has fallen to 5 %. */
  readonly practicalRangeKm: number;
  readonly sill: number;
  readonly nugget: number;
  readonly fixed: readonly string[];
  readonly boundsReached: readonly string[];
  readonly longRangeLimit: boolean;
}

export interface ScoreSummary {
  readonly variable: string;
  /** `isoscape`, then the baselines. */
  readonly method: string;
  readonly stationCount: number;
  readonly rmse: number;
  readonly meanSquaredZ: number;
  /** Share of stations within their 90 % interval. */
  readonly coverage90: number;
}

/** What `fit` ends with, in numbers; `fitReport` and `fitJson` show it. */
export interface FitSummary {
  readonly isoscape: Isoscape;
  readonly stationsUsed: number;
  readonly stationsLeftOut: number;
  readonly stationsOfOneIsotope: number;
  readonly elevationEffect: IsotopeEffects | null;
  readonly centreLatitudeDeg: number;
  readonly latitudeEffect: IsotopeEffects | null;
  /** ‰ per unit of each covariate. */
  readonly covariateEffects: ReturnType<typeof covariateEffects>;
  readonly fields: readonly FieldSummary[];
  /** null for a one-isotope isoscape. */
  readonly axes: AxesSummary | null;
  readonly scores: readonly ScoreSummary[];
}

/** @param leaveOneOut closed-form leave-one-out of the isoscape and its baselines */
export function summariseFit(isoscape: Isoscape, leaveOneOut: SchemeResult): FitSummary {
  const fields = isoscape.isotopes === 'both' ? [isoscape.along, isoscape.across] : [isoscape.field];
  const centre = centreLatitudeDeg(isoscape);
  return {
    isoscape,
    stationsUsed: isoscape.stations.id.length,
    stationsLeftOut: isoscape.stationsLeftOut,
    stationsOfOneIsotope: isoscape.oneIsotopeStationIds.length,
    elevationEffect: elevationEffect(isoscape),
    centreLatitudeDeg: centre,
    latitudeEffect: latitudeEffect(isoscape, centre),
    covariateEffects: covariateEffects(isoscape),
    fields: fields.map((field) => fieldSummary(field, isoscape)),
    axes: isoscape.isotopes === 'both' ? axesSummary(isoscape) : null,
    scores: leaveOneOut.variables.flatMap(({ variable, methods }) =>
      methods.map(({ method, scores }) => scoreSummary(variable, method, scores)),
    ),
  };
}

function fieldSummary(field: FittedField, isoscape: Isoscape): FieldSummary {
  const { rangeKm, sill, nugget } = field.parameters;
  return {
    name: field.name,
    rangeKm,
    practicalRangeKm: practicalRangeKm(isoscape.family, rangeKm),
    sill,
    nugget,
    fixed: field.fixed,
    boundsReached: field.boundsReached,
    longRangeLimit: field.longRangeLimit,
  };
}

function scoreSummary(variable: string, method: string, scores: Scores): ScoreSummary {
  return {
    variable,
    method,
    stationCount: scores.count,
    rmse: scores.rmse,
    meanSquaredZ: scores.meanSquaredZ,
    coverage90: coverageAt(scores, SUMMARY_LEVEL),
  };
}
