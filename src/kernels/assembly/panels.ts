// Packed panels: four columns of a row-major matrix, [row][4], so that a register tile reads them in order. Rows
// and columns that the matrix does not have are 0.

/** Bytes of one row of a panel. */
export const PANEL_ROW: usize = 32;

/**
 * Packs rows 0..rows−1 of a row-major matrix into panels.
 * @param from    the matrix; @param stride bytes between its rows
 * @param panels  ceil(columns/4) panels of `panelBytes` bytes each
 */
export function packPanels(
  from: usize, stride: usize, rows: i32, columns: i32, panels: usize, panelBytes: usize,
): void {
  const whole = columns >> 2;
  const rest = columns & 3;
  for (let row = 0; row < rows; row++) {
    let source = from + usize(row) * stride;
    let target = panels + usize(row) * PANEL_ROW;
    for (let p = 0; p < whole; p++) {
      v128.store(target, v128.load(source));
      v128.store(target, v128.load(source, 16), 16);
      source += PANEL_ROW;
      target += panelBytes;
    }
    for (let c = 0; rest > 0 && c < 4; c++) {
      const value = c < rest ? load<f64>(source + (usize(c) << 3)) : 0;
      store<f64>(target + (usize(c) << 3), value);
    }
  }
}

/** The way back: panels to a row-major matrix. Arguments as `packPanels`. */
export function unpackPanels(
  panels: usize, panelBytes: usize, rows: i32, columns: i32, to: usize, stride: usize,
): void {
  const whole = columns >> 2;
  const rest = columns & 3;
  for (let row = 0; row < rows; row++) {
    let source = panels + usize(row) * PANEL_ROW;
    let target = to + usize(row) * stride;
    for (let p = 0; p < whole; p++) {
      v128.store(target, v128.load(source));
      v128.store(target, v128.load(source, 16), 16);
      source += panelBytes;
      target += PANEL_ROW;
    }
    for (let c = 0; c < rest; c++) {
      store<f64>(target + (usize(c) << 3), load<f64>(source + (usize(c) << 3)));
    }
  }
}

/**
 * Packs up to four rows of a row-major matrix, columns first..first+count−1, into one panel [column][4]: a panel of
 * the transposed matrix. Rows from `valid` on are 0.
 * @param from  first row at the first column
 */
export function packRowsAsPanel(from: usize, stride: usize, valid: i32, count: i32, panel: usize): void {
  for (let r = 0; r < 4; r++) {
    let source = from + usize(r) * stride;
    let target = panel + (usize(r) << 3);
    const isThere = r < valid;
    for (let k = 0; k < count; k++) {
      store<f64>(target, isThere ? load<f64>(source) : 0);
      source += 8;
      target += PANEL_ROW;
    }
  }
}
