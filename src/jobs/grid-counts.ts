import { SUPPORT_FLAGS } from '../isoscape/index.js';

/** What became of the cells of a block, or of a grid: each cell is counted once, up to `flagged`. */
export interface GridCounts {
  /** Cells with a prediction in the file. */
  predicted: number;
  /** Left nodata because the predicted value cannot be precipitation (see `impossibleValue`). */
  impossible: number;
  /** Not wanted: outside the mask, or without a value in the template. */
  masked: number;
  /** Not wanted: sea, where land only was asked for. */
  sea: number;
  /** Beyond the reach of the CRS. */
  offEarth: number;
  withoutElevation: number;
  withoutCovariate: number;
  /** Predicted cells that lean on little, and how many each flag names (by bit). */
  flagged: number;
  readonly byFlag: number[];
}

export function createCounts(): GridCounts {
  return {
    predicted: 0,
    impossible: 0,
    masked: 0,
    sea: 0,
    offEarth: 0,
    withoutElevation: 0,
    withoutCovariate: 0,
    flagged: 0,
    byFlag: SUPPORT_FLAGS.map(() => 0),
  };
}

export function addCounts(sum: GridCounts, part: GridCounts): void {
  for (const key of COUNTED) sum[key] += part[key];
  part.byFlag.forEach((count, bit) => {
    sum.byFlag[bit]! += count;
  });
}

const COUNTED = [
  'predicted',
  'impossible',
  'masked',
  'sea',
  'offEarth',
  'withoutElevation',
  'withoutCovariate',
  'flagged',
] as const satisfies readonly Exclude<keyof GridCounts, 'byFlag'>[];

/** Counts support bits of the wanted cells. */
export function countFlags(flags: Uint8Array, wanted: Uint8Array, counts: GridCounts): void {
  const seen = new Int32Array(1 << SUPPORT_FLAGS.length);
  for (let k = 0; k < flags.length; k++) if (wanted[k] === 1) seen[flags[k]!]!++;
  for (let bits = 1; bits < seen.length; bits++) {
    counts.flagged += seen[bits]!;
    for (let bit = 0; bit < SUPPORT_FLAGS.length; bit++) {
      if ((bits & (1 << bit)) !== 0) counts.byFlag[bit]! += seen[bits]!;
    }
  }
}
