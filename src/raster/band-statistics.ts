/** Statistics of the cells that have a value; `m2` is the sum of squared distances to the mean. */
export interface BandStatistics {
  readonly count: number;
  /** NaN where `count` is 0, as are max and mean. */
  readonly min: number;
  readonly max: number;
  readonly mean: number;
  readonly m2: number;
}

export const NO_STATISTICS: BandStatistics = {
  count: 0,
  min: Number.NaN,
  max: Number.NaN,
  mean: Number.NaN,
  m2: 0,
};

/** Statistics of one block of a band, in two passes: one loses digits where the mean is far from 0. */
export function bandStatistics(band: Float32Array): BandStatistics {
  let count = 0;
  let sum = 0;
  let min = Number.POSITIVE_INFINITY;
  let max = Number.NEGATIVE_INFINITY;
  for (let k = 0; k < band.length; k++) {
    const value = band[k]!;
    if (Number.isNaN(value)) continue;
    count++;
    sum += value;
    min = Math.min(min, value);
    max = Math.max(max, value);
  }
  if (count === 0) return NO_STATISTICS;
  const mean = sum / count;
  return { count, min, max, mean, m2: squaredDistances(band, mean) };
}

function squaredDistances(band: Float32Array, mean: number): number {
  let sum = 0;
  for (let k = 0; k < band.length; k++) {
    const distance = band[k]! - mean;
    if (!Number.isNaN(distance)) sum += distance * distance;
  }
  return sum;
}

/**
 * Statistics of two sets of cells together (Chan, Golub & LeVeque 1983, equations 2.1). Rounding depends on the order of
 * merging, so whoever wants the same digits always merges in one fixed order.
 */
export function mergeStatistics(a: BandStatistics, b: BandStatistics): BandStatistics {
  if (a.count === 0) return b;
  if (b.count === 0) return a;
  const count = a.count + b.count;
  const apart = b.mean - a.mean;
  return {
    count,
    min: Math.min(a.min, b.min),
    max: Math.max(a.max, b.max),
    mean: a.mean + (apart * b.count) / count,
    m2: a.m2 + b.m2 + (apart ** 2 * a.count * b.count) / count,
  };
}

/** Standard deviation over the cells (divisor `count`, as GDAL has it). */
export function standardDeviation({ m2, count }: BandStatistics): number {
  return Math.sqrt(m2 / count);
}
