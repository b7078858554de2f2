export interface CoverageGrid {
  readonly width: number;
  readonly height: number;
  readonly westDeg: number;
  readonly northDeg: number;
  readonly cellDeg: number;
}
export function landCoverage(topology: unknown, grid: CoverageGrid): Float32Array;
