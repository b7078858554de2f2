/** Covariance families the kernels compute, by their names in the model; formulas in geostat/covariance. */
export const COVARIANCE_KINDS = ['exponential', 'matern32', 'matern52', 'spherical'] as const;
export type CovarianceKind = (typeof COVARIANCE_KINDS)[number];
