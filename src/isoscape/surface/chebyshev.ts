/**
 * Chebyshev nodes of the first kind on [0, 1], ascending: x_i = (1 − cos((2i + 1)π/2k))/2 (Trefethen 2013,
 * Approximation Theory and Approximation Practice, ch. 2 and 5).
 */
export function chebyshevNodes(order: number): Float64Array {
  return Float64Array.from(
    { length: order },
    (_, i) => (1 - Math.cos(((2 * i + 1) * Math.PI) / (2 * order))) / 2,
  );
}

/**
 * Values of the Lagrange polynomials of the Chebyshev nodes at points of [0, 1]: order × targets.length, row-major, so
 * that f(targets) = Σ_i f(x_i)·row_i. Barycentric form (Berrut & Trefethen 2004, SIAM Review 46:501–517), stable at
 * the nodes too.
 */
export function lagrangeRows(order: number, targets: Float64Array): Float64Array {
  const nodes = chebyshevNodes(order);
  const count = targets.length;
  const rows = new Float64Array(order * count);
  for (let c = 0; c < count; c++) {
    let sum = 0;
    let hit = -1;
    for (let i = 0; i < order; i++) {
      const gap = targets[c] - nodes[i];
      if (gap === 0) hit = i;
      const weight = ((i & 1) === 0 ? 1 : -1) * Math.sin(((2 * i + 1) * Math.PI) / (2 * order));
      rows[i * count + c] = weight / gap;
      sum += rows[i * count + c];
    }
    for (let i = 0; i < order; i++) {
      rows[i * count + c] = hit < 0 ? rows[i * count + c] / sum : Number(i === hit);
    }
  }
  return rows;
}

/**
 * Interpolates functions given on order × order nodes (rows of a tile outermost) to a lattice of columns × rows.
 *
 * @param values  functionCount × order × order
 * @param across  order × columns (`lagrangeRows` of the lattice's columns); @param down order × rows
 * @param scratch at least order × columns; @param out functionCount × rows × columns
 */
export function interpolateLattice(
  values: Float64Array,
  functionCount: number,
  order: number,
  across: Float64Array,
  columns: number,
  down: Float64Array,
  rows: number,
  scratch: Float64Array,
  out: Float64Array,
): void {
  for (let f = 0; f < functionCount; f++) {
    for (let j = 0; j < order; j++) {
      combineRows(across, order, columns, values, (f * order + j) * order, 1, scratch, j * columns);
    }
    for (let y = 0; y < rows; y++) {
      combineRows(scratch, order, columns, down, y, rows, out, (f * rows + y) * columns);
    }
  }
}

/** out[outOffset + c] = Σ_i factors[offset + i·stride]·rows[i × columns + c], two rows at a time. */
function combineRows(
  rows: Float64Array,
  count: number,
  columns: number,
  factors: Float64Array,
  offset: number,
  stride: number,
  out: Float64Array,
  outOffset: number,
): void {
  let i = 0;
  if ((count & 1) === 1) {
    const a = factors[offset];
    for (let c = 0; c < columns; c++) out[outOffset + c] = a * rows[c];
    i = 1;
  } else {
    const a = factors[offset];
    const b = factors[offset + stride];
    for (let c = 0; c < columns; c++) out[outOffset + c] = a * rows[c] + b * rows[columns + c];
    i = 2;
  }
  for (; i < count; i += 2) {
    const a = factors[offset + i * stride];
    const b = factors[offset + (i + 1) * stride];
    const rowA = i * columns;
    const rowB = rowA + columns;
    for (let c = 0; c < columns; c++) out[outOffset + c] += a * rows[rowA + c] + b * rows[rowB + c];
  }
}
