export { choleskyInPlace, dot } from './cholesky.js';
export { crossProduct, innerProduct, multiplyVector } from './products.js';
export {
  inverseFromCholesky,
  solveLowerInPlace,
  solveLowerManyInPlace,
  solveLowerTransposedInPlace,
} from './triangular.js';
