import type { Isoscape } from '../../isoscape/index.js';
import type { MethodResult, SchemeResult, ValidationResult } from '../../isoscape/validation.js';

/** The whole validation for machines: scores, and every station's observed and predicted values in ‰. */
export function validationJson(isoscape: Isoscape, result: ValidationResult): string {
  const json = {
    isoscape_id: result.isoscapeId,
    network: isoscape.networkName,
    isotopes: result.isotopes,
    stations: result.stationCount,
    level: result.level,
    plug_in: result.plugIn,
    leave_one_out: schemeJson(result.leaveOneOut),
    blocked: {
      ...schemeJson(result.blocked),
      folds: result.folds.map(({ fold, heldOutCount, trainingCount, failure }) => ({
        fold,
        held_out: heldOutCount,
        fitted: trainingCount,
        failure,
      })),
    },
    beyond_three_sd: {
      expected_if_gaussian: result.outlyingExpected,
      stations: result.outlying.map((each) => ({
        id: each.id,
        name: each.name,
        variable: each.variable,
        observed_permil: each.observed,
        predicted_permil: each.predicted,
        sd_permil: each.sd,
        z: each.z,
      })),
    },
    station_ids: isoscape.stations.id,
    fold_of_station: Array.from(result.foldOfStation),
    predictions: [result.leaveOneOut, result.blocked].flatMap((scheme) => seriesJson(scheme)),
    notes: result.notes,
  };
  return `${JSON.stringify(json, null, 2)}\n`; // NaN becomes null
}

function schemeJson(scheme: SchemeResult) {
  return {
    median_nearest_station_km: scheme.medianNearestKm,
    scores: scheme.variables.flatMap(({ variable, methods }) =>
      methods.map(({ method, scores }) => ({
        variable,
        method,
        stations: scores.count,
        rmse_permil: scores.rmse,
        mae_permil: scores.mae,
        bias_permil: scores.bias,
        crps_permil: scores.crps,
        log_score: scores.logScore,
        mean_squared_z: scores.meanSquaredZ,
        coverage: scores.coverage,
        pit: Array.from(scores.pit),
      })),
    ),
  };
}

/** Predictions in the order of `station_ids`. */
function seriesJson({ scheme, variables }: SchemeResult) {
  return variables.flatMap(({ variable, observed, methods }) =>
    methods.map(({ method, mean, variance }: MethodResult) => ({
      scheme,
      variable,
      method,
      observed_permil: Array.from(observed),
      predicted_permil: Array.from(mean),
      sd_permil: Array.from(variance, Math.sqrt),
    })),
  );
}
