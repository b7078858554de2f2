/** Named arrays of one thread that grow when asked and are used again: nothing is allocated per cell. */
export class Scratch {
  readonly #arrays = new Map<string, Float64Array>();

  /** At least `length` elements, holding whatever they held. */
  array(name: string, length: number): Float64Array {
    const kept = this.#arrays.get(name);
    if (kept !== undefined && kept.length >= length) return kept;
    const grown = new Float64Array(length);
    this.#arrays.set(name, grown);
    return grown;
  }
}
