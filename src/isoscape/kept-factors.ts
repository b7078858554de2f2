/** Memory (bytes) up to which the factors of all nodes of a field are kept; beyond it each is rebuilt when needed. */
const KEPT_FACTORS_BYTES = 256 * 2 ** 20;

/** Whether a factor over all stations for every node of a field may be kept. */
export function mayKeepFactors(nodeCount: number, stationCount: number): boolean {
  return nodeCount * stationCount ** 2 * Float64Array.BYTES_PER_ELEMENT <= KEPT_FACTORS_BYTES;
}
