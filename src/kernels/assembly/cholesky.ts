// Cholesky factor in place, blocked left-looking (Golub & Van Loan 2013, Matrix Computations, §4.2): a block of
// columns takes the product of the columns before it, a stretch at a time, and is then factored row tile by row
// tile, every tile against the packed triangle of the block.

import { PANEL_ROW, packRowsAsPanel } from './panels';
import { rowTile } from './tile';

/** Columns factored together. */
const BLOCK = 64;
/** Columns taken from at a time. */
const STRETCH = 256;
/** Bytes between the packed rows of one tile. */
const PACKED: usize = usize(STRETCH) * PANEL_ROW;

/**
 * A = LLᵀ in place, lower triangle; the upper one is neither read nor written.
 *
 * @param packed  scratch, BLOCK × STRETCH numbers
 * @param tile    scratch, one tile; holds the pivot that was not positive after a failure
 * @returns −1, or the index of the first pivot that is not positive (or NaN)
 */
export function cholesky(a: usize, n: i32, packed: usize, tile: usize): i32 {
  const stride = usize(n) << 3;
  for (let j0 = 0; j0 < n; j0 += BLOCK) {
    const j1 = min(j0 + BLOCK, n);
    for (let k0 = 0; k0 < j0; k0 += STRETCH) {
      takeStretch(a, stride, n, j0, j1, k0, min(STRETCH, j0 - k0), packed, tile);
    }
    for (let i = j0; i < n; i += 4) {
      for (let j = j0; j < min(i, j1); j += 4) solveTile(a, stride, n, i, j, j0, packed, tile);
      if (i < j1) {
        const failed = factorTile(a, stride, n, i, j0, packed, tile);
        if (failed >= 0) return failed;
      }
    }
  }
  return -1;
}

/** A[i][j] −= Σ_k L[i][k]·L[j][k] over one stretch of k, for the lower part of the columns j0..j1−1. */
function takeStretch(
  a: usize, stride: usize, n: i32, j0: i32, j1: i32, k0: i32, count: i32, packed: usize, tile: usize,
): void {
  for (let j = j0; j < j1; j += 4) {
    packRowsAsPanel(
      a + usize(j) * stride + (usize(k0) << 3), stride, n - j, count, packed + usize((j - j0) >> 2) * PACKED,
    );
  }
  for (let i = j0; i < n; i += 4) {
    for (let j = j0; j < min(i + 4, j1); j += 4) {
      productTile(a, stride, n, i, k0, packed + usize((j - j0) >> 2) * PACKED, count, tile);
      subtractTile(a, stride, n, i, j, tile);
    }
  }
}

/** tile = rows i..i+3 of L, columns from k0, times a packed panel. Rows beyond the last repeat it. */
function productTile(
  a: usize, stride: usize, n: i32, i: i32, k0: i32, panel: usize, count: i32, tile: usize,
): void {
  const at = usize(k0) << 3;
  const last = n - 1;
  rowTile(
    a + usize(i) * stride + at,
    a + usize(min(i + 1, last)) * stride + at,
    a + usize(min(i + 2, last)) * stride + at,
    a + usize(min(i + 3, last)) * stride + at,
    panel, count, tile,
  );
}

/** Rows i..i+3, columns j..j+3 of A minus a tile, on and below the diagonal only. */
function subtractTile(a: usize, stride: usize, n: i32, i: i32, j: i32, tile: usize): void {
  const rows = min(4, n - i);
  for (let r = 0; r < rows; r++) {
    const target = a + usize(i + r) * stride + (usize(j) << 3);
    const source = tile + usize(r) * PANEL_ROW;
    if (j < i) {
      v128.store(target, f64x2.sub(v128.load(target), v128.load(source)));
      v128.store(target, f64x2.sub(v128.load(target, 16), v128.load(source, 16)), 16);
    } else {
      for (let c: usize = 0; c <= usize(r) << 3; c += 8) {
        store<f64>(target + c, load<f64>(target + c) - load<f64>(source + c));
      }
    }
  }
}

/** L[i..i+3][j..j+3] below the diagonal: minus the product within the block, then through the triangle at j. */
function solveTile(
  a: usize, stride: usize, n: i32, i: i32, j: i32, j0: i32, packed: usize, tile: usize,
): void {
  if (j > j0) {
    productTile(a, stride, n, i, j0, packed + usize((j - j0) >> 2) * PACKED, j - j0, tile);
    subtractTile(a, stride, n, i, j, tile);
  }
  const rows = min(4, n - i);
  const at = usize(j) << 3;
  const l1 = a + usize(j + 1) * stride + at;
  const l2 = a + usize(j + 2) * stride + at;
  const l3 = a + usize(j + 3) * stride + at;
  const d0 = 1 / load<f64>(a + usize(j) * stride + at);
  const d1 = 1 / load<f64>(l1, 8);
  const d2 = 1 / load<f64>(l2, 16);
  const d3 = 1 / load<f64>(l3, 24);
  for (let r = 0; r < rows; r++) {
    const x = a + usize(i + r) * stride + at;
    const x0 = load<f64>(x) * d0;
    const x1 = (load<f64>(x, 8) - x0 * load<f64>(l1)) * d1;
    const x2 = (load<f64>(x, 16) - x0 * load<f64>(l2) - x1 * load<f64>(l2, 8)) * d2;
    const x3 = (load<f64>(x, 24) - x0 * load<f64>(l3) - x1 * load<f64>(l3, 8) - x2 * load<f64>(l3, 16)) * d3;
    store<f64>(x, x0);
    store<f64>(x, x1, 8);
    store<f64>(x, x2, 16);
    store<f64>(x, x3, 24);
  }
}

/** The tile on the diagonal at i: minus the product within the block, then factored. Packs its rows for those below. */
function factorTile(
  a: usize, stride: usize, n: i32, i: i32, j0: i32, packed: usize, tile: usize,
): i32 {
  const panel = packed + usize((i - j0) >> 2) * PACKED;
  if (i > j0) {
    packRowsAsPanel(a + usize(i) * stride + (usize(j0) << 3), stride, n - i, i - j0, panel);
    productTile(a, stride, n, i, j0, panel, i - j0, tile);
    subtractTile(a, stride, n, i, i, tile);
  }
  const rows = min(4, n - i);
  const at = usize(i) << 3;
  for (let r = 0; r < rows; r++) {
    const row = a + usize(i + r) * stride + at;
    for (let c = 0; c <= r; c++) {
      const other = a + usize(i + c) * stride + at;
      let sum = load<f64>(row + (usize(c) << 3));
      for (let k: usize = 0; k < usize(c) << 3; k += 8) sum -= load<f64>(row + k) * load<f64>(other + k);
      if (c < r) {
        store<f64>(row + (usize(c) << 3), sum / load<f64>(other + (usize(c) << 3)));
      } else if (sum > 0) {
        store<f64>(row + (usize(c) << 3), Math.sqrt(sum));
      } else {
        store<f64>(tile, sum);
        return i + r;
      }
    }
  }
  return -1;
}
