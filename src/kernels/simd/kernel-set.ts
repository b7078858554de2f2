import { COVARIANCE_KINDS, type CovarianceKind } from '../covariance-kind.js';
import type { DenseWorkspace, KernelSet } from '../kernel-set.js';
import { referenceKernels } from '../reference/kernel-set.js';
import { compiledModule } from './compiled-kernels.js';
import { writeCovariances } from './covariance.js';
import { DenseMemory } from './dense-memory.js';
import { fitsKernelMemory } from './kernel-memory.js';
import { covarianceLayout, denseLayout, productLayout } from './layout.js';
import { scratchMemory } from './scratch.js';
import { createDenseWorkspace, workspaceIn, workspaceOf } from './workspace.js';

// Sizes from which copying in and out is paid back. They depend on sizes alone: one call always goes one way, and its
// result does not depend on what else the thread has done.
const CHOLESKY_ROWS = 32;
const SOLVE_ROWS = 32;
const SOLVE_COLUMNS = 16;
const INVERSE_ROWS = 24;
const PRODUCT_OPERATIONS = 16_384;
const PRODUCT_INNER = 4;
const COVARIANCES = 64;
const CORRELATION_ROWS = 32;
/** Enough for matrices of 200 rows. */
const FIRST_SCRATCH_BYTES = 2 ** 20;

/**
 * The compiled kernels; null where the engine has no WebAssembly SIMD, or no room for one memory: an engine may reserve
 * 10 GB of addresses for each, which a limit on them (`ulimit -v`) can forbid.
 */
export function simdKernels(): KernelSet | null {
  if (compiledModule() === null) return null;
  try {
    scratchMemory(FIRST_SCRATCH_BYTES);
    return SIMD_KERNELS;
  } catch {
    return null;
  }
}

const SIMD_KERNELS: KernelSet = {
  name: 'simd',
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

function choleskyInPlace(a: Float64Array, n: number): void {
  const dense = n < CHOLESKY_ROWS ? null : scratch(n, 0);
  if (dense === null) {
    referenceKernels.choleskyInPlace(a, n);
    return;
  }
  dense.matrix.set(a.subarray(0, n * n));
  dense.cholesky();
  a.set(dense.matrix);
}

function solveLowerManyInPlace(l: Float64Array, n: number, b: Float64Array, width: number): void {
  const dense = n < SOLVE_ROWS || width < SOLVE_COLUMNS ? null : scratch(n, width);
  if (dense === null) {
    referenceKernels.solveLowerManyInPlace(l, n, b, width);
    return;
  }
  dense.matrix.set(l.subarray(0, n * n));
  const block = dense.block(width);
  block.set(b.subarray(0, n * width));
  dense.solveLower(width);
  b.set(block);
}

function inverseFromCholesky(l: Float64Array, n: number, work: Float64Array, out: Float64Array): void {
  const dense = n < INVERSE_ROWS ? null : scratch(n, n);
  if (dense === null) {
    referenceKernels.inverseFromCholesky(l, n, work, out);
    return;
  }
  dense.matrix.set(l.subarray(0, n * n));
  dense.inverse();
  dense.copyTransposedInverseFactor(work);
  out.set(dense.matrix);
}

function multiplyInto(
  a: Float64Array,
  rows: number,
  inner: number,
  b: Float64Array,
  columns: number,
  out: Float64Array,
): void {
  const isSmall = rows * inner * columns < PRODUCT_OPERATIONS || inner < PRODUCT_INNER;
  const layout = productLayout(rows, inner, columns);
  if (isSmall || !fitsKernelMemory(layout.bytes)) {
    referenceKernels.multiplyInto(a, rows, inner, b, columns, out);
    return;
  }
  const memory = scratchMemory(layout.bytes);
  memory.numbers(layout.a, rows * inner).set(a.subarray(0, rows * inner));
  memory.numbers(layout.b, inner * columns).set(b.subarray(0, inner * columns));
  const { a: atA, b: atB, out: atOut, panels, tile } = layout;
  memory.kernels.multiply(atA, rows, inner, atB, columns, atOut, panels, tile);
  out.set(memory.numbers(atOut, rows * columns));
}

function covarianceBlock(
  kind: CovarianceKind,
  sill: number,
  rangeKm: number,
  stationsKm: Float64Array,
  n: number,
  placesKm: Float64Array,
  first: number,
  count: number,
  out: Float64Array,
): void {
  const own = workspaceOf(out);
  if (own !== undefined && n <= own.n && count <= own.width) {
    const { positions } = own.layout;
    const address = out.byteOffset;
    writeCovariances(
      own.memory,
      positions,
      kind,
      sill,
      rangeKm,
      stationsKm,
      n,
      placesKm,
      first,
      count,
      address,
    );
    return;
  }
  const layout = covarianceLayout(n, count);
  if (n * count < COVARIANCES || !fitsKernelMemory(layout.bytes)) {
    referenceKernels.covarianceBlock(kind, sill, rangeKm, stationsKm, n, placesKm, first, count, out);
    return;
  }
  const memory = scratchMemory(layout.bytes);
  const { block, positions } = layout;
  writeCovariances(memory, positions, kind, sill, rangeKm, stationsKm, n, placesKm, first, count, block);
  out.set(memory.numbers(block, n * count));
}

function correlations(
  kind: CovarianceKind,
  what: 'correlation' | 'slope',
  rangeKm: number,
  distancesKm: Float64Array,
  n: number,
  out: Float64Array,
): void {
  if (n < CORRELATION_ROWS) {
    referenceKernels.correlations(kind, what, rangeKm, distancesKm, n, out);
    return;
  }
  const memory = scratchMemory(8 * (n + 1));
  const code = COVARIANCE_KINDS.indexOf(kind);
  const row = memory.numbers(0, n + 1);
  for (let i = 0; i < n; i++) {
    row.set(distancesKm.subarray(i * n, i * n + i + 1));
    row[i] = 0;
    memory.kernels.correlations(code, rangeKm, 0, i + 1, what === 'slope' ? 1 : 0);
    out.set(row.subarray(0, i + 1), i * n);
  }
}

function borrowWorkspace(l: Float64Array | null, n: number, width: number): DenseWorkspace {
  const { bytes } = denseLayout(n, width);
  if (!fitsKernelMemory(bytes)) return referenceKernels.borrowWorkspace(l, n, width);
  const workspace = workspaceIn(scratchMemory(bytes), n, width);
  if (l !== null) workspace.matrix.set(l.subarray(0, n * n));
  return workspace;
}

function withInverse(l: Float64Array, n: number, use: (inverse: Float64Array) => void): void {
  const dense = n < INVERSE_ROWS ? null : scratch(n, n);
  if (dense === null) {
    referenceKernels.withInverse(l, n, use);
    return;
  }
  dense.matrix.set(l.subarray(0, n * n));
  dense.inverse();
  use(dense.matrix);
}

/** Scratch for an n × n matrix and a block; null where it would be larger than a memory may be. */
function scratch(n: number, width: number): DenseMemory | null {
  const { bytes } = denseLayout(n, width);
  return fitsKernelMemory(bytes) ? new DenseMemory(scratchMemory(bytes), n, width) : null;
}
