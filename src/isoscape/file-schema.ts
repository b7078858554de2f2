import { z } from 'zod';
import { COVARIANCE_FAMILIES } from '../geostat/index.js';

/** Shape of an isoscape file: checked once at the border, plain typed data inside. */

const column = z
  .array(z.number().nullable())
  .transform((values) => Float64Array.from(values, (value) => value ?? Number.NaN));
const finiteColumn = z.array(z.number()).transform((values) => Float64Array.from(values));
const hash = z.string().regex(/^[0-9a-f]{64}$/, 'must be 64 hexadecimal digits');

const parameters = { rangeKm: z.number().positive(), sill: z.number().min(0), nugget: z.number().min(0) };

const fittedField = z.strictObject({
  name: z.enum(['along', 'across', 'd18O', 'd2H']),
  values: finiteColumn,
  samplingVariance: finiteColumn,
  parameters: z.strictObject(parameters),
  fixed: z.array(z.enum(['range_km', 'sill', 'nugget'])),
  logLikelihood: z.number(),
  coefficients: finiteColumn,
  coefficientCovariance: finiteColumn,
  nodes: z.array(z.strictObject({ ...parameters, weight: z.number().min(0).max(1) })).min(1),
  boundsReached: z.array(z.string()),
  longRangeLimit: z.boolean(),
});

const pairCovariance = z.tuple([z.number(), z.number(), z.number()]);

/** The isotope an isoscape of one isotope does not use has no variance and no covariance: null in JSON. */
const orMissing = z
  .number()
  .nullable()
  .transform((value) => value ?? Number.NaN);
const samplingCovariance = z.tuple([orMissing, orMissing, orMissing]);

const sampling = z.discriminatedUnion('kind', [
  z.strictObject({
    kind: z.literal('records'),
    within: samplingCovariance,
    withinTotal: samplingCovariance,
    pooledRecords: z.number(),
    amountWeighted: z.boolean(),
  }),
  z.strictObject({
    kind: z.literal('standard-deviations'),
    within: samplingCovariance,
    withinTotal: samplingCovariance,
    assumedCorrelation: z.number(),
  }),
  z.strictObject({ kind: z.literal('none') }),
]);

const stations = z
  .strictObject({
    id: z.array(z.string()),
    name: z.array(z.string()),
    lonDeg: finiteColumn,
    latDeg: finiteColumn,
    elevationM: finiteColumn,
    d18O: column,
    d2H: column,
    effectiveRecords: column,
    covariates: z.array(finiteColumn).default([]),
  })
  .refine(
    ({ covariates, ...columns }) =>
      new Set([...Object.values(columns), ...covariates].map((values) => values.length)).size === 1,
    { message: 'the station columns differ in length' },
  );

const covariate = z.strictObject({
  name: z.string(),
  source: z.string(),
  centre: z.number(),
  scale: z.number().positive(),
});

const common = {
  format: z.literal('rainprint-isoscape'),
  id: hash,
  schemaVersion: z.number(),
  algorithmVersion: z.number().int(),
  toolVersion: z.string(),
  networkName: z.string(),
  season: z.strictObject({ months: z.array(z.number().int().min(1).max(12)).min(1), label: z.string() }),
  years: z.strictObject({ from: z.number().int(), to: z.number().int() }).nullable(),
  stations,
  stationsLeftOut: z.number().int().min(0),
  oneIsotopeStationIds: z.array(z.string()),
  sampling,
  samplingScale: z.number(),
  samplingScaleFitted: z.boolean(),
  family: z.enum(COVARIANCE_FAMILIES),
  familyChosen: z.enum(['auto', 'fixed']),
  familyCandidates: z.array(
    z.strictObject({ family: z.enum(COVARIANCE_FAMILIES), logLikelihood: z.number() }),
  ),
  terms: z.array(z.string()),
  covariates: z.array(covariate).default([]),
  likelihood: z
    .strictObject({ method: z.literal('vecchia'), neighbours: z.number().int().positive() })
    .or(z.strictObject({ method: z.literal('exact') }))
    .default({ method: 'exact' }),
  termsChosen: z.enum(['auto', 'fixed']),
  trendCandidates: z.array(
    z.strictObject({
      terms: z.array(z.string()),
      logLikelihood: z.number(),
      parameterCount: z.number().int(),
      // Infinite (too few stations for the set) is null in JSON.
      aicc: z
        .number()
        .nullable()
        .transform((value) => value ?? Number.POSITIVE_INFINITY),
    }),
  ),
  support: z.strictObject({
    farFromStationsKm: z.number(),
    elevationMinM: z.number(),
    elevationMaxM: z.number(),
    latitudeMinDeg: z.number(),
    latitudeMaxDeg: z.number(),
  }),
  notes: z.array(z.string()),
};

export const fileSchema = z.discriminatedUnion('isotopes', [
  z.strictObject({
    ...common,
    isotopes: z.literal('both'),
    whitening: pairCovariance,
    turnRad: z.number(),
    turnVarianceRad2: z.number().min(0),
    turnFixed: z.boolean(),
    along: fittedField,
    across: fittedField,
  }),
  z.strictObject({ ...common, isotopes: z.literal('d18O'), field: fittedField }),
  z.strictObject({ ...common, isotopes: z.literal('d2H'), field: fittedField }),
]);
