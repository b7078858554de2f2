/**
 * An order of the stations and, for each, the nearest ones before it on which its value is conditioned in Vecchia's
 * approximation of the likelihood (Vecchia 1988, J. R. Stat. Soc. B 50:297–312).
 */
export interface ConditioningSets {
  /** Stations before a station that it is conditioned on, at most. */
  readonly neighbourCount: number;
  /** neighbourCount + 1, the length of a row of `members`. */
  readonly size: number;
  /**
   * n × size station indices, one row a step of the order: the earlier stations, the step's own station last. The
   * first rows have fewer; their leading places hold the own station and count for nothing.
   */
  readonly members: Int32Array;
}

/** Leading places of a row of `members` that count for nothing. */
export function paddingOf(sets: ConditioningSets, step: number): number {
  return Math.max(0, sets.neighbourCount - step);
}

const known = new WeakMap<Float64Array, Map<number, ConditioningSets>>();

/**
 * Sets of up to `neighbourCount` stations in maximum–minimum-distance order: each next station is the one farthest
 * from all before it, so that the first ones span the network and the last ones fill it (Guinness 2018, Technometrics
 * 60:415–429; Katzfuss & Guinness 2021, Stat. Sci. 36:124–141). It depends on places only, not on their order but for
 * ties, which go to the station given first. About n² distances; kept as long as the array of positions is.
 *
 * @param positionsKm  n × 3, not to be changed afterwards
 */
export function conditioningSets(positionsKm: Float64Array, neighbourCount: number): ConditioningSets {
  const slot = known.get(positionsKm) ?? new Map<number, ConditioningSets>();
  known.set(positionsKm, slot);
  const found = slot.get(neighbourCount) ?? build(positionsKm, neighbourCount);
  slot.set(neighbourCount, found);
  return found;
}

function build(positionsKm: Float64Array, neighbourCount: number): ConditioningSets {
  const order = spreadingOrder(positionsKm);
  const n = order.length;
  const size = neighbourCount + 1;
  const members = new Int32Array(n * size);
  const ordered = new Float64Array(3 * n);
  for (let k = 0; k < n; k++) {
    for (let axis = 0; axis < 3; axis++) ordered[3 * k + axis] = positionsKm[3 * order[k] + axis];
  }
  const nearest = new Int32Array(neighbourCount);
  const distances = new Float64Array(neighbourCount);
  for (let k = 0; k < n; k++) {
    const count = nearestBefore(ordered, k, nearest, distances);
    const row = k * size;
    members.fill(order[k], row, row + size);
    for (let j = 0; j < count; j++) members[row + neighbourCount - count + j] = order[nearest[j]];
  }
  return { neighbourCount, size, members };
}

/** Station indices in maximum–minimum-distance order, from the one nearest to the middle of all. */
function spreadingOrder(positionsKm: Float64Array): Int32Array {
  const n = positionsKm.length / 3;
  const middle = new Float64Array(3);
  for (let i = 0; i < 3 * n; i++) middle[i % 3] += positionsKm[i] / n;
  const gap = new Float64Array(n);
  let next = 0;
  for (let i = 0; i < n; i++) {
    gap[i] = squaredDistance(positionsKm, i, middle, 0);
    if (gap[i] < gap[next]) next = i;
  }
  gap.fill(Number.POSITIVE_INFINITY);
  const order = new Int32Array(n);
  for (let k = 0; k < n; k++) {
    order[k] = next;
    gap[next] = -1;
    let farthest = -1;
    for (let i = 0; i < n; i++) {
      if (gap[i] < 0) continue;
      const d = squaredDistance(positionsKm, i, positionsKm, next);
      if (d < gap[i]) gap[i] = d;
      if (farthest < 0 || gap[i] > gap[farthest]) farthest = i;
    }
    next = farthest;
  }
  return order;
}

/** Writes the nearest of the places before `k`, nearest first, by insertion; returns how many. */
function nearestBefore(
  positionsKm: Float64Array,
  k: number,
  out: Int32Array,
  distances: Float64Array,
): number {
  let count = 0;
  for (let j = 0; j < k; j++) {
    const d = squaredDistance(positionsKm, k, positionsKm, j);
    if (count === out.length && !(d < distances[count - 1])) continue;
    if (count < out.length) count++;
    let at = count - 1;
    for (; at > 0 && d < distances[at - 1]; at--) {
      distances[at] = distances[at - 1];
      out[at] = out[at - 1];
    }
    distances[at] = d;
    out[at] = j;
  }
  return count;
}

function squaredDistance(a: Float64Array, i: number, b: Float64Array, j: number): number {
  const dx = a[3 * i] - b[3 * j];
  const dy = a[3 * i + 1] - b[3 * j + 1];
  const dz = a[3 * i + 2] - b[3 * j + 2];
  return dx * dx + dy * dy + dz * dz;
}
