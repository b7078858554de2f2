// The compiled kernels. They know no memory layout: every address, scratch included, comes from the host (../simd).

export { cholesky } from './cholesky';
export { correlations, covariance, exponentials } from './covariance';
export { inverse } from './inverse';
export { multiply } from './multiply';
export { packPanels, unpackPanels } from './panels';
export { solveLower, solveLowerTransposed } from './solve';
