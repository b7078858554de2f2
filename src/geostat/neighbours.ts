/** Neighbours kept for each place; a search that finds all of them excluded looks at every place instead. */
const KEPT = 8;

/** Nearest places by straight distance, with some left out: what nearest-station predictions need again and again. */
export interface Neighbours {
  readonly count: number;
  /**
   * The nearest other place that is not excluded, −1 where none is left. Among equal distances the place
   * given first.
   * @param excluded 1 for each place left out
   */
  nearest(place: number, excluded: Uint8Array): number;
  /** Straight distance between two places, km. */
  distanceKm(a: number, b: number): number;
}

/** @param positionsKm count × 3, row-major */
export function findNeighbours(positionsKm: Float64Array): Neighbours {
  const count = positionsKm.length / 3;
  const kept = Math.min(KEPT, count - 1);
  const lists = new Int32Array(count * kept);
  for (let i = 0; i < count; i++) keepNearest(positionsKm, i, lists.subarray(i * kept, (i + 1) * kept));
  return {
    count,
    nearest(place, excluded) {
      for (let k = 0; k < kept; k++) {
        const candidate = lists[place * kept + k];
        if (excluded[candidate] === 0) return candidate;
      }
      return scan(positionsKm, place, excluded);
    },
    distanceKm: (a, b) => Math.sqrt(squaredDistance(positionsKm, a, b)),
  };
}

/** Writes the nearest places of `place`, nearest first, by insertion. */
function keepNearest(positionsKm: Float64Array, place: number, out: Int32Array): void {
  const distances = new Float64Array(out.length).fill(Number.POSITIVE_INFINITY);
  const count = positionsKm.length / 3;
  for (let j = 0; j < count; j++) {
    if (j === place) continue;
    const d = squaredDistance(positionsKm, place, j);
    if (!(d < distances[out.length - 1])) continue;
    let at = out.length - 1;
    for (; at > 0 && d < distances[at - 1]; at--) {
      distances[at] = distances[at - 1];
      out[at] = out[at - 1];
    }
    distances[at] = d;
    out[at] = j;
  }
}

function scan(positionsKm: Float64Array, place: number, excluded: Uint8Array): number {
  let best = -1;
  let bestDistance = Number.POSITIVE_INFINITY;
  for (let j = 0; j < excluded.length; j++) {
    if (j === place || excluded[j] !== 0) continue;
    const d = squaredDistance(positionsKm, place, j);
    if (d < bestDistance) {
      best = j;
      bestDistance = d;
    }
  }
  return best;
}

function squaredDistance(positionsKm: Float64Array, a: number, b: number): number {
  const dx = positionsKm[3 * a] - positionsKm[3 * b];
  const dy = positionsKm[3 * a + 1] - positionsKm[3 * b + 1];
  const dz = positionsKm[3 * a + 2] - positionsKm[3 * b + 2];
  return dx * dx + dy * dy + dz * dz;
}
