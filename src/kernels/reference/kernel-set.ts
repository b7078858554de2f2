import type { KernelSet } from '../kernel-set.js';
import { choleskyInPlace } from './cholesky.js';
import { correlations, covarianceBlock } from './covariance.js';
import { inverseFromCholesky, withInverse } from './inverse.js';
import { multiplyInto } from './multiply.js';
import { solveLowerManyInPlace } from './triangular.js';
import { borrowWorkspace, createDenseWorkspace } from './workspace.js';

/** The kernels in plain TypeScript: what the compiled ones are compared with, and the way without SIMD. */
export const referenceKernels: KernelSet = {
  name: 'reference',
  createDenseWorkspace,
  choleskyInPlace,
  solveLowerManyInPlace,
  inverseFromCholesky,
  multiplyInto,
  covarianceBlock,
  correlations,
  borrowWorkspace,
  withInverse,
};
