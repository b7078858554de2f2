/** What stands at a cell's centre. */
export const GROUND = {
  land: 0,
  /** Inside the raster, but less than half of the cell has a value. */
  sea: 1,
  /** Beyond the raster's edge, or where the frame's CRS does not reach: nothing is known. */
  outside: 2,
} as const;

/** Elevation of the cells of a window, row-major; NaN where `ground` is not land. */
export interface FrameElevation {
  readonly elevationM: Float32Array;
  /** Variance of the land heights inside the cell, or in the 3 × 3 neighbourhood of its centre where that is wider. */
  readonly varianceM2: Float32Array;
  /** A value of `GROUND`. */
  readonly ground: Uint8Array;
}

export function createFrameElevation(count: number): FrameElevation {
  return {
    elevationM: new Float32Array(count).fill(Number.NaN),
    varianceM2: new Float32Array(count).fill(Number.NaN),
    ground: new Uint8Array(count).fill(GROUND.outside),
  };
}

/**
 * Sample variance from count, sum and sum of squares (heights below 10⁴ m leave ten digits of the squares). A lone land
 * cell falls to the sea within the cell: its variance is the one it has together with a height of 0 m, e²/2.
 */
export function landVariance(landCount: number, sumM: number, squaresM2: number): number {
  if (landCount === 0) return Number.NaN;
  if (landCount === 1) return squaresM2 / 2;
  return Math.max(0, (squaresM2 - (sumM * sumM) / landCount) / (landCount - 1));
}
