// Triangular solves with many right-hand sides. The right-hand sides stand in packed panels. Blocked left-looking:
// a block of rows takes from the rows solved before it, a stretch of them at a time so that both operands stay in
// the caches (a stretch of a panel, 8 kB, in the first level; a block of L, 128 kB, in the second), and is then
// solved tile by tile.

import { PANEL_ROW } from './panels';
import { panelTile, rowTile } from './tile';

/** Rows solved together. */
const BLOCK = 64;
/** Rows taken from at a time. */
const STRETCH = 256;

/**
 * X := L⁻¹X. With `triangular` X holds the columns of the identity on entry and the rows of panel p above row 4p are 0
 * and not touched, which leaves a third of the work.
 *
 * @param l           n × n row-major, lower triangle
 * @param panels      `panelCount` panels of `panelBytes` bytes; rows beyond n within the last tile are scratch
 * @param reciprocal  scratch, n numbers: 1 over the diagonal of L
 * @param tile        scratch, one tile
 */
export function solveLower(
  l: usize, n: i32, panels: usize, panelBytes: usize, panelCount: i32, triangular: bool,
  reciprocal: usize, tile: usize,
): void {
  const stride = usize(n) << 3;
  for (let i = 0; i < n; i++) {
    store<f64>(reciprocal + (usize(i) << 3), 1 / load<f64>(l + usize(i) * stride + (usize(i) << 3)));
  }
  for (let i0 = 0; i0 < n; i0 += BLOCK) {
    const i1 = min(i0 + BLOCK, n);
    const used = triangular ? min(panelCount, (i1 + 3) >> 2) : panelCount;
    for (let k0 = 0; k0 < i0; k0 += STRETCH) {
      const k1 = min(k0 + STRETCH, i0);
      for (let p = 0; p < used; p++) {
        const from = triangular ? max(k0, p << 2) : k0;
        if (from >= k1) break;
        const panel = panels + usize(p) * panelBytes;
        for (let i = i0; i < i1; i += 4) {
          takeRows(l, stride, n, i, from, k1, panel, tile);
        }
      }
    }
    for (let p = 0; p < used; p++) {
      const first = triangular ? max(i0, p << 2) : i0;
      const panel = panels + usize(p) * panelBytes;
      for (let i = first; i < i1; i += 4) {
        if (i > first) takeRows(l, stride, n, i, first, i, panel, tile);
        solveTile(l, stride, n, i, panel, reciprocal);
      }
    }
  }
}

/** X[i..i+3] −= L[i..i+3][from..to−1]·X[from..to−1] in one panel. */
function takeRows(
  l: usize, stride: usize, n: i32, i: i32, from: i32, to: i32, panel: usize, tile: usize,
): void {
  const at = usize(from) << 3;
  const last = n - 1;
  rowTile(
    l + usize(i) * stride + at,
    l + usize(min(i + 1, last)) * stride + at,
    l + usize(min(i + 2, last)) * stride + at,
    l + usize(min(i + 3, last)) * stride + at,
    panel + usize(from) * PANEL_ROW, to - from, tile,
  );
  subtractTile(panel + usize(i) * PANEL_ROW, tile);
}

/** Four rows of a panel minus a tile. */
function subtractTile(rows: usize, tile: usize): void {
  for (let offset: usize = 0; offset < 128; offset += 32) {
    v128.store(rows + offset, f64x2.sub(v128.load(rows + offset), v128.load(tile + offset)));
    v128.store(rows + offset, f64x2.sub(v128.load(rows + offset, 16), v128.load(tile + offset, 16)), 16);
  }
}

/** Rows i..i+3 of a panel by forward substitution with the 4 × 4 triangle on L's diagonal. */
function solveTile(l: usize, stride: usize, n: i32, i: i32, panel: usize, reciprocal: usize): void {
  const rows = min(4, n - i);
  const x = panel + usize(i) * PANEL_ROW;
  for (let r = 0; r < rows; r++) {
    const row = l + usize(i + r) * stride + (usize(i) << 3);
    let x0 = v128.load(x + usize(r) * PANEL_ROW);
    let x1 = v128.load(x + usize(r) * PANEL_ROW, 16);
    for (let q = 0; q < r; q++) {
      const factor = v128.load_splat<f64>(row + (usize(q) << 3));
      x0 = f64x2.sub(x0, f64x2.mul(factor, v128.load(x + usize(q) * PANEL_ROW)));
      x1 = f64x2.sub(x1, f64x2.mul(factor, v128.load(x + usize(q) * PANEL_ROW, 16)));
    }
    const scale = v128.load_splat<f64>(reciprocal + (usize(i + r) << 3));
    v128.store(x + usize(r) * PANEL_ROW, f64x2.mul(x0, scale));
    v128.store(x + usize(r) * PANEL_ROW, f64x2.mul(x1, scale), 16);
  }
}

/**
 * X := L⁻ᵀX, from the last rows up. The columns of L are packed block by block, for they stand far apart in memory.
 *
 * @param packed  scratch, BLOCK × STRETCH numbers
 */
export function solveLowerTransposed(
  l: usize, n: i32, panels: usize, panelBytes: usize, panelCount: i32, packed: usize, tile: usize,
): void {
  const stride = usize(n) << 3;
  for (let i0 = ((n - 1) / BLOCK) * BLOCK; i0 >= 0; i0 -= BLOCK) {
    const i1 = min(i0 + BLOCK, n);
    for (let k0 = i1; k0 < n; k0 += STRETCH) {
      const count = min(STRETCH, n - k0);
      packColumns(l, stride, n, i0, i1, k0, count, packed);
      for (let p = 0; p < panelCount; p++) {
        const panel = panels + usize(p) * panelBytes;
        for (let i = i0; i < i1; i += 4) {
          const a = packed + usize((i - i0) >> 2) * (usize(STRETCH) * PANEL_ROW);
          panelTile(a, panel + usize(k0) * PANEL_ROW, count, tile);
          subtractTile(panel + usize(i) * PANEL_ROW, tile);
        }
      }
    }
    packColumns(l, stride, n, i0, i1, i0, i1 - i0, packed);
    for (let p = 0; p < panelCount; p++) {
      const panel = panels + usize(p) * panelBytes;
      for (let i = i0 + (((i1 - i0 - 1) >> 2) << 2); i >= i0; i -= 4) {
        const a = packed + usize((i - i0) >> 2) * (usize(STRETCH) * PANEL_ROW);
        if (i + 4 < i1) {
          panelTile(
            a + usize(i + 4 - i0) * PANEL_ROW, panel + usize(i + 4) * PANEL_ROW, i1 - i - 4, tile,
          );
          subtractTile(panel + usize(i) * PANEL_ROW, tile);
        }
        solveTransposedTile(a + usize(i - i0) * PANEL_ROW, min(4, n - i), panel + usize(i) * PANEL_ROW);
      }
    }
  }
}

/** Columns i0..i1−1, rows k0..k0+count−1 of L, four columns a panel of STRETCH rows; 0 beyond the last column. */
function packColumns(
  l: usize, stride: usize, n: i32, i0: i32, i1: i32, k0: i32, count: i32, packed: usize,
): void {
  for (let i = i0; i < i1; i += 4) {
    const columns = min(4, n - i);
    let target = packed + usize((i - i0) >> 2) * (usize(STRETCH) * PANEL_ROW);
    let source = l + usize(k0) * stride + (usize(i) << 3);
    for (let k = 0; k < count; k++) {
      if (columns == 4) {
        v128.store(target, v128.load(source));
        v128.store(target, v128.load(source, 16), 16);
      } else {
        for (let c = 0; c < 4; c++) {
          store<f64>(target + (usize(c) << 3), c < columns ? load<f64>(source + (usize(c) << 3)) : 0);
        }
      }
      source += stride;
      target += PANEL_ROW;
    }
  }
}

/** Four rows x by back substitution: a[k][c] is L's number in row k, column c of the triangle on the diagonal. */
function solveTransposedTile(a: usize, rows: i32, x: usize): void {
  for (let r = rows - 1; r >= 0; r--) {
    let x0 = v128.load(x + usize(r) * PANEL_ROW);
    let x1 = v128.load(x + usize(r) * PANEL_ROW, 16);
    for (let q = r + 1; q < rows; q++) {
      const factor = v128.load_splat<f64>(a + usize(q) * PANEL_ROW + (usize(r) << 3));
      x0 = f64x2.sub(x0, f64x2.mul(factor, v128.load(x + usize(q) * PANEL_ROW)));
      x1 = f64x2.sub(x1, f64x2.mul(factor, v128.load(x + usize(q) * PANEL_ROW, 16)));
    }
    const scale = f64x2.splat(1 / load<f64>(a + usize(r) * PANEL_ROW + (usize(r) << 3)));
    v128.store(x + usize(r) * PANEL_ROW, f64x2.mul(x0, scale));
    v128.store(x + usize(r) * PANEL_ROW, f64x2.mul(x1, scale), 16);
  }
}
