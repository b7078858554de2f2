/**
 * Who answers for each name of check-values.json: a test file, or the list of those that wait for a part not built
 * yet. tests/check-values.test.ts fails for a name that is in neither, in both, or claimed by a file that does not
 * read its records.
 */
const GEOSTAT = 'tests/geostat/check-values.test.ts';
const ISOTOPE = 'tests/isotope/check-values.test.ts';
const STATIONS = 'tests/stations/check-values.test.ts';

export const CLAIMED: Readonly<Record<string, string>> = {
  d_excess: ISOTOPE,
  d_excess_sd: ISOTOPE,
  amount_weighted_mean: STATIONS,
  amount_weighted_d_excess: STATIONS,
  year_coverage: STATIONS,
  great_circle_km: GEOSTAT,
  uk_gls_beta_18O: GEOSTAT,
  uk_prediction: GEOSTAT,
  reml_loglik_18O: GEOSTAT,
  loo_universal_kriging_18O: GEOSTAT,
  leave_group_out_18O: GEOSTAT,
  block_kriging_18O: GEOSTAT,
  cokriging_equals_kriging: GEOSTAT,
  intrinsic_model_reml: GEOSTAT,
  min_eigenvalue_24_points_on_equator: GEOSTAT,
  crps_gaussian: GEOSTAT,
  pit_gaussian: GEOSTAT,
  log_score_gaussian: GEOSTAT,
};

/** Waiting for the isotope arithmetic: delta scale, fractionation, evaporation, meteoric lines. */
const ISOTOPE_ARITHMETIC = [
  'delta_to_ratio',
  'two_point_normalisation_2H',
  'two_point_normalisation_18O',
  'alpha_liquid_vapour_2H',
  'alpha_liquid_vapour_18O',
  'epsilon_ratio_2H_18O',
  'alpha_ice_vapour_2H',
  'alpha_ice_vapour_18O',
  'kinetic_epsilon_merlivat',
  'kinetic_epsilon_cappa',
  'kinetic_epsilon_gonfiantini',
  'turbulence_exponent_soil',
  'craig_gordon',
  'craig_gordon_lel_slope_secant',
  'desiccating_volume',
  'throughflow_steady_state',
  'source_water_intersection',
  'source_water_uncertainty',
  'source_water_uncertainty_monte_carlo',
  'source_water_iterated_secant',
  'source_water_exact_path',
  'humidity_normalised_to_water_surface',
  'lel_slope_fixed_atmosphere',
  'rayleigh_isothermal',
  'gmwl_2H_from_18O',
  'lmwl_ols',
  'lmwl_rma',
  'lmwl_pwlsr',
  'lmwl_pwrma',
  'rma_from_sums_published_example',
  'lc_excess',
  'lc_excess_star_scale',
] as const;

/** Waiting for the weighing of origins and for tissue samples. */
const PROVENANCE = [
  'provenance_lr_water',
  'provenance_lr_tissue',
  'posterior_three_cells',
  'chi2_2df_quantile',
  'enamel_carbonate_to_phosphate',
  'enamel_carbonate_to_drinking_water',
  'non_exchangeable_H',
] as const;

export const WAITING: readonly string[] = [...ISOTOPE_ARITHMETIC, ...PROVENANCE];
