// Inverse of a symmetric matrix from its Cholesky factor: X = L⁻¹ in packed panels, then XᵀX, whose columns are the
// panels themselves. 2n³/3 operations.

import { PANEL_ROW } from './panels';
import { solveLower } from './solve';
import { panelTile } from './tile';

/** Rows of X multiplied at a time, and panels that share them (128 kB together). */
const STRETCH = 256;
const PANELS = 16;

/**
 * L in place of the matrix on entry, (LLᵀ)⁻¹ on return, both triangles.
 *
 * @param panels      scratch, ceil(n/4) panels of `panelBytes` bytes; holds L⁻¹ on return
 * @param reciprocal  scratch, n numbers; @param tile scratch, one tile
 */
export function inverse(
  a: usize, n: i32, panels: usize, panelBytes: usize, reciprocal: usize, tile: usize,
): void {
  const count = (n + 3) >> 2;
  memory.fill(panels, 0, usize(count) * panelBytes);
  for (let j = 0; j < n; j++) {
    store<f64>(panels + usize(j >> 2) * panelBytes + usize(j) * PANEL_ROW + (usize(j & 3) << 3), 1);
  }
  solveLower(a, n, panels, panelBytes, count, true, reciprocal, tile);
  const stride = usize(n) << 3;
  for (let k0 = 0; k0 < n; k0 += STRETCH) {
    const k1 = min(k0 + STRETCH, n);
    // Panels that start below the stretch are 0 in it.
    const used = (k1 + 3) >> 2;
    for (let j0 = 0; j0 < used; j0 += PANELS) {
      for (let i = j0; i < used; i++) {
        const from = max(k0, i << 2);
        const at = usize(from) * PANEL_ROW;
        for (let j = j0; j < min(j0 + PANELS, i + 1); j++) {
          panelTile(
            panels + usize(i) * panelBytes + at, panels + usize(j) * panelBytes + at, k1 - from, tile,
          );
          placeTile(a, stride, n, i << 2, j << 2, tile, from > k0 || k0 == i << 2);
        }
      }
    }
  }
  mirror(a, stride, n);
}

/** Rows i.., columns j.. of the lower triangle := the tile, or plus it. */
function placeTile(a: usize, stride: usize, n: i32, i: i32, j: i32, tile: usize, isFirst: bool): void {
  const rows = min(4, n - i);
  for (let r = 0; r < rows; r++) {
    const target = a + usize(i + r) * stride + (usize(j) << 3);
    const source = tile + usize(r) * PANEL_ROW;
    if (j < i) {
      let s0 = v128.load(source);
      let s1 = v128.load(source, 16);
      if (!isFirst) {
        s0 = f64x2.add(s0, v128.load(target));
        s1 = f64x2.add(s1, v128.load(target, 16));
      }
      v128.store(target, s0);
      v128.store(target, s1, 16);
    } else {
      for (let c: usize = 0; c <= usize(r) << 3; c += 8) {
        store<f64>(target + c, isFirst ? load<f64>(source + c) : load<f64>(target + c) + load<f64>(source + c));
      }
    }
  }
}

/** Upper triangle := lower, in squares of 16 so that both sides stay in the cache. */
function mirror(a: usize, stride: usize, n: i32): void {
  for (let i0 = 0; i0 < n; i0 += 16) {
    for (let j0 = 0; j0 <= i0; j0 += 16) {
      for (let i = i0; i < min(i0 + 16, n); i++) {
        const row = a + usize(i) * stride;
        for (let j = j0; j < min(j0 + 16, i); j++) {
          store<f64>(a + usize(j) * stride + (usize(i) << 3), load<f64>(row + (usize(j) << 3)));
        }
      }
    }
  }
}
