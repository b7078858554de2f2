import { RainprintError } from '../errors.js';

/** The one error of a matrix that has no Cholesky factor, the same from every implementation. */
export function notPositiveDefinite(n: number, pivot: number, value: number): RainprintError {
  return new RainprintError(
    'MATRIX_NOT_POSITIVE_DEFINITE',
    `matrix of ${n} rows is not positive definite: pivot ${pivot} is ${value}`,
    { pivot, rows: n },
  );
}
