const RAD = Math.PI / 180;
/** Cells decided together: small, so that most squares lie wholly on one side of every limit. */
export const SQUARE = 16;

/** Cells of a window of a grid, row-major. Only those `wanted` (1) are looked at. */
export interface SquareCells {
  readonly width: number;
  readonly height: number;
  readonly lonDeg: Float64Array;
  readonly latDeg: Float64Array;
  readonly wanted: Uint8Array;
}

/** The wanted cells of one square as unit vectors, and a ball around them (of the space, not of the surface). */
export interface Square {
  count: number;
  readonly cell: Int32Array;
  readonly vectors: Float64Array;
  readonly centre: Float64Array;
  radius: number;
  /** False where no cell of the square is wanted. */
  enclose(cells: SquareCells, left: number, top: number): boolean;
}

export function createSquare(): Square {
  const memo = {
    lonDeg: new Float64Array(SQUARE).fill(Number.NaN),
    cosLon: new Float64Array(SQUARE),
    sinLon: new Float64Array(SQUARE),
  };
  const square: Square = {
    count: 0,
    cell: new Int32Array(SQUARE * SQUARE),
    vectors: new Float64Array(3 * SQUARE * SQUARE),
    centre: new Float64Array(3),
    radius: 0,
    enclose(cells, left, top) {
      square.count = 0;
      for (let row = top; row < Math.min(top + SQUARE, cells.height); row++) {
        addRow(square, cells, row * cells.width, left, memo);
      }
      if (square.count === 0) return false;
      encloseBall(square);
      return true;
    },
  };
  return square;
}

interface LongitudeMemo {
  readonly lonDeg: Float64Array;
  readonly cosLon: Float64Array;
  readonly sinLon: Float64Array;
}

/** Sines and cosines are made anew only where a longitude differs from the cell above, a latitude from that before. */
function addRow(square: Square, cells: SquareCells, start: number, left: number, memo: LongitudeMemo): void {
  const { vectors, cell } = square;
  let latDeg = Number.NaN;
  let cosLat = 0;
  let sinLat = 0;
  const end = Math.min(left + SQUARE, cells.width);
  for (let column = left; column < end; column++) {
    const k = start + column;
    if (cells.wanted[k] !== 1) continue;
    const x = column - left;
    if (cells.lonDeg[k] !== memo.lonDeg[x]) {
      memo.lonDeg[x] = cells.lonDeg[k];
      memo.cosLon[x] = Math.cos(cells.lonDeg[k] * RAD);
      memo.sinLon[x] = Math.sin(cells.lonDeg[k] * RAD);
    }
    if (cells.latDeg[k] !== latDeg) {
      latDeg = cells.latDeg[k];
      cosLat = Math.cos(latDeg * RAD);
      sinLat = Math.sin(latDeg * RAD);
    }
    const at = 3 * square.count;
    vectors[at] = cosLat * memo.cosLon[x];
    vectors[at + 1] = cosLat * memo.sinLon[x];
    vectors[at + 2] = sinLat;
    cell[square.count++] = k;
  }
}

function encloseBall(square: Square): void {
  const { vectors, centre, count } = square;
  centre.fill(0);
  for (let i = 0; i < 3 * count; i += 3) {
    centre[0] += vectors[i];
    centre[1] += vectors[i + 1];
    centre[2] += vectors[i + 2];
  }
  for (let axis = 0; axis < 3; axis++) centre[axis] /= count;
  let largest = 0;
  for (let i = 0; i < 3 * count; i += 3) {
    const x = vectors[i] - centre[0];
    const y = vectors[i + 1] - centre[1];
    const z = vectors[i + 2] - centre[2];
    largest = Math.max(largest, x * x + y * y + z * z);
  }
  square.radius = Math.sqrt(largest);
}
