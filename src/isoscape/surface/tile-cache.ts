/** Keeps what was made last, up to so many bytes. */
export class TileCache<T> {
  readonly #kept = new Map<string, { readonly value: T; readonly bytes: number }>();
  readonly #limitBytes: number;
  #bytes = 0;

  constructor(limitBytes: number) {
    this.#limitBytes = limitBytes;
  }

  get(key: string): T | undefined {
    const found = this.#kept.get(key);
    if (found === undefined) return undefined;
    this.#kept.delete(key);
    this.#kept.set(key, found); // a Map remembers the order of insertion: the youngest is last
    return found.value;
  }

  set(key: string, value: T, bytes: number): void {
    this.#kept.set(key, { value, bytes });
    this.#bytes += bytes;
    for (const [oldest, { bytes: freed }] of this.#kept) {
      if (this.#bytes <= this.#limitBytes || oldest === key) return;
      this.#kept.delete(oldest);
      this.#bytes -= freed;
    }
  }
}
