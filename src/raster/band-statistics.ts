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

/**
 * Statistics of one block of a band, in one pass over distances to the first value. With n cells the squared distance of
 * that value to the mean is at most n variances, so even where it lies far off all others mean and deviation keep ten
 * digits of the deviation (n ≤ 512²).
 */
export function bandStatistics(band: Float32Array): BandStatistics {
  let start = 0;
  while (start < band.length && Number.isNaN(band[start]!)) start++;
  if (start === band.length) return NO_STATISTICS;
  const first = band[start]!;
  let count = 0;
  let sum = 0;
  let squares = 0;
  let min = first;
  let max = first;
  for (let k = start; k < band.length; k++) {
    const value = band[k]!;
    if (Number.isNaN(value)) continue;
    const distance = value - first;
    count++;
    sum += distance;
    squares += distance * distance;
    min = Math.min(min, value);
    max = Math.max(max, value);
  }
  const m2 = Math.max(0, squares - (sum * sum) / count);
  return { count, min, max, mean: first + sum / count, m2 };
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
