export { COVARIANCE_KINDS, type CovarianceKind } from './covariance-kind.js';
export {
  borrowWorkspace,
  choleskyInPlace,
  correlationMatrix,
  covarianceBlock,
  createDenseWorkspace,
  inverseFromCholesky,
  multiplyInto,
  solveLowerManyInPlace,
  withInverse,
} from './dense.js';
export type { DenseWorkspace } from './kernel-set.js';
export { dot } from './reference/cholesky.js';
export { crossProduct, innerProduct, multiplySymmetric, multiplyVector } from './reference/products.js';
export { solveLowerInPlace, solveLowerTransposedInPlace } from './reference/triangular.js';
export { kernelName, useKernels } from './selection.js';
