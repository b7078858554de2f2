/** Share of the largest entry below which a pivot counts as nothing. */
const NOTHING = 1e-13;

/**
 * A vector c ≠ 0 with A·c = 0 for k conditions on k + 1 unknowns, by elimination with complete pivoting (Golub &
 * Van Loan 2013, Matrix Computations, §3.4); some c_i is above 0.
 *
 * @param rows  k rows of k + 1 numbers; overwritten
 */
export function nullVector(rows: number[][]): number[] {
  const k = rows.length;
  const order = Array.from({ length: k + 1 }, (_, i) => i);
  const largest = rows.reduce((most, row) => row.reduce((a, b) => Math.max(a, Math.abs(b)), most), 0);
  let rank = 0;
  for (; rank < k; rank++) {
    const pivot = largestEntry(rows, order, rank);
    if (!(pivot.size > NOTHING * largest)) break;
    [rows[rank], rows[pivot.row]] = [rows[pivot.row]!, rows[rank]!];
    [order[rank], order[pivot.column]] = [order[pivot.column]!, order[rank]!];
    const head = rows[rank]!;
    const column = order[rank]!;
    for (let i = rank + 1; i < k; i++) {
      const factor = rows[i]![column]! / head[column]!;
      for (let j = rank; j <= k; j++) rows[i]![order[j]!]! -= factor * head[order[j]!]!;
    }
  }
  // The first unknown without a pivot is set to 1, the others without to 0; then back through the pivots.
  const solution = new Array<number>(k + 1).fill(0);
  solution[order[rank]!] = 1;
  for (let i = rank - 1; i >= 0; i--) {
    let value = 0;
    for (let j = i + 1; j <= rank; j++) value -= rows[i]![order[j]!]! * solution[order[j]!]!;
    solution[order[i]!] = value / rows[i]![order[i]!]!;
  }
  return solution;
}

function largestEntry(
  rows: readonly number[][],
  order: readonly number[],
  from: number,
): { row: number; column: number; size: number } {
  let best = { row: from, column: from, size: -1 };
  for (let i = from; i < rows.length; i++) {
    for (let j = from; j < order.length; j++) {
      const size = Math.abs(rows[i]![order[j]!]!);
      if (size > best.size) best = { row: i, column: j, size };
    }
  }
  return best;
}
