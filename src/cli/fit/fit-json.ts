import type { IsotopeEffects } from '../../isoscape/effects.js';
import type { FitSummary } from './fit-summary.js';

/** The summary for machines: names with units, null for what is not there. */
export function fitJson(summary: FitSummary): string {
  const { isoscape } = summary;
  return `${JSON.stringify(
    {
      isoscape_id: isoscape.id,
      network: isoscape.networkName,
      isotopes: isoscape.isotopes,
      season: isoscape.season.label,
      years: isoscape.years,
      stations: {
        used: summary.stationsUsed,
        left_out: summary.stationsLeftOut,
        of_one_isotope: summary.stationsOfOneIsotope,
      },
      sampling: {
        known_from: isoscape.sampling.kind,
        scale: isoscape.samplingScale,
        scale_fitted: isoscape.samplingScaleFitted,
      },
      elevation_effect_permil_per_100m: effects(summary.elevationEffect),
      latitude_effect_permil_per_degree:
        summary.latitudeEffect === null
          ? null
          : { latitude_deg: summary.centreLatitudeDeg, ...effects(summary.latitudeEffect) },
      ...covariates(summary),
      family: isoscape.family,
      terms: isoscape.terms,
      fields: summary.fields.map((field) => ({
        name: field.name,
        range_km: field.rangeKm,
        range_5_percent_km: field.practicalRangeKm,
        sill: field.sill,
        nugget: field.nugget,
        fixed: field.fixed,
        bounds_reached: field.boundsReached,
        long_range_limit: field.longRangeLimit,
      })),
      axes:
        summary.axes === null
          ? null
          : {
              along_slope: summary.axes.alongSlope,
              across_slope: summary.axes.acrossSlope,
              within_slope: summary.axes.withinSlope,
              turn_deg: summary.axes.turnDeg,
              turn_se_deg: summary.axes.turnSeDeg, // NaN (fixed) becomes null in JSON
            },
      leave_one_out: summary.scores.map((score) => ({
        variable: score.variable,
        method: score.method,
        stations: score.stationCount,
        rmse_permil: score.rmse,
        mean_squared_z: score.meanSquaredZ,
        coverage_90: score.coverage90,
      })),
      trend_candidates: isoscape.trendCandidates.map((candidate) => ({
        terms: candidate.terms,
        log_likelihood: candidate.logLikelihood,
        parameters: candidate.parameterCount,
        aicc: candidate.aicc,
      })),
      family_candidates: isoscape.familyCandidates.map((candidate) => ({
        family: candidate.family,
        restricted_log_likelihood: candidate.logLikelihood,
      })),
      notes: isoscape.notes,
    },
    null,
    2,
  )}\n`;
}

/** Only where there are any: without them the output is what it was. */
function covariates({ isoscape, covariateEffects }: FitSummary) {
  if (isoscape.covariates.length === 0) return {};
  return {
    covariates: isoscape.covariates.map(({ name, source }, k) => ({
      name,
      source,
      effect_permil_per_unit: effects(covariateEffects[k].effects),
    })),
  };
}

function effects(found: IsotopeEffects | null): IsotopeEffects | null {
  return found === null ? null : { d18O: found.d18O, d2H: found.d2H, dexcess: found.dexcess };
}
