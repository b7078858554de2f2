// Product of two row-major matrices: rows of the first as they stand, the second in packed panels.

import { PANEL_ROW, packPanels } from './panels';
import { rowTile } from './tile';

/** Rows of A, and numbers of the inner dimension, multiplied at a time (128 kB of A). */
const BLOCK = 64;
const STRETCH = 256;

/**
 * out = A·B.
 *
 * @param a       rows × inner; @param b inner × columns; @param out rows × columns
 * @param panels  scratch, ceil(columns/4) panels of `inner` rows; @param tile scratch, one tile
 */
export function multiply(
  a: usize, rows: i32, inner: i32, b: usize, columns: i32, out: usize, panels: usize, tile: usize,
): void {
  const stride = usize(inner) << 3;
  const panelBytes = usize(inner) * PANEL_ROW;
  const count = (columns + 3) >> 2;
  packPanels(b, usize(columns) << 3, inner, columns, panels, panelBytes);
  if (inner == 0) memory.fill(out, 0, (usize(rows) * usize(columns)) << 3);
  for (let k0 = 0; k0 < inner; k0 += STRETCH) {
    const k = min(STRETCH, inner - k0);
    for (let i0 = 0; i0 < rows; i0 += BLOCK) {
      for (let p = 0; p < count; p++) {
        const panel = panels + usize(p) * panelBytes + usize(k0) * PANEL_ROW;
        for (let i = i0; i < min(i0 + BLOCK, rows); i += 4) {
          const at = a + (usize(k0) << 3);
          rowTile(
            at + usize(i) * stride,
            at + usize(min(i + 1, rows - 1)) * stride,
            at + usize(min(i + 2, rows - 1)) * stride,
            at + usize(min(i + 3, rows - 1)) * stride,
            panel, k, tile,
          );
          placeTile(out, rows, columns, i, p << 2, tile, k0 == 0);
        }
      }
    }
  }
}

/** Rows i.., columns j.. of out := the tile, or plus it. */
function placeTile(out: usize, rows: i32, columns: i32, i: i32, j: i32, tile: usize, isFirst: bool): void {
  const validRows = min(4, rows - i);
  const validColumns = min(4, columns - j);
  for (let r = 0; r < validRows; r++) {
    const target = out + ((usize(i + r) * usize(columns) + usize(j)) << 3);
    const source = tile + usize(r) * PANEL_ROW;
    if (validColumns == 4) {
      let s0 = v128.load(source);
      let s1 = v128.load(source, 16);
      if (!isFirst) {
        s0 = f64x2.add(s0, v128.load(target));
        s1 = f64x2.add(s1, v128.load(target, 16));
      }
      v128.store(target, s0);
      v128.store(target, s1, 16);
    } else {
      for (let c: usize = 0; c < usize(validColumns) << 3; c += 8) {
        store<f64>(target + c, isFirst ? load<f64>(source + c) : load<f64>(target + c) + load<f64>(source + c));
      }
    }
  }
}
