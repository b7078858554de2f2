import { notPositiveDefinite } from '../not-positive-definite.js';
import type { KernelMemory } from './kernel-memory.js';
import { type DenseLayout, denseLayout, panelCountOf } from './layout.js';

/** The dense kernels on one n × n matrix and one block, both inside a kernel memory. */
export class DenseMemory {
  readonly n: number;
  readonly width: number;
  readonly matrix: Float64Array;
  readonly #memory: KernelMemory;
  readonly #layout: DenseLayout;

  constructor(memory: KernelMemory, n: number, width: number) {
    this.n = n;
    this.width = width;
    this.#memory = memory;
    this.#layout = denseLayout(n, width);
    this.matrix = memory.numbers(this.#layout.matrix, n * n);
  }

  get memory(): KernelMemory {
    return this.#memory;
  }

  get layout(): DenseLayout {
    return this.#layout;
  }

  /** The block as n × columns, row-major. */
  block(columns: number): Float64Array {
    return this.#memory.numbers(this.#layout.block, this.n * columns);
  }

  cholesky(): void {
    const { matrix, packed, tile } = this.#layout;
    const pivot = this.#memory.kernels.cholesky(matrix, this.n, packed, tile);
    if (pivot >= 0) throw notPositiveDefinite(this.n, pivot, this.#memory.numbers(tile, 1)[0]);
  }

  solveLower(columns: number): void {
    const { matrix, panels, panelBytes, reciprocal, tile } = this.#layout;
    const { kernels } = this.#memory;
    const count = panelCountOf(columns);
    this.#pack(columns);
    kernels.solveLower(matrix, this.n, panels, panelBytes, count, 0, reciprocal, tile);
    this.#unpack(columns);
  }

  solveLowerTransposed(columns: number): void {
    const { matrix, panels, panelBytes, packed, tile } = this.#layout;
    const { kernels } = this.#memory;
    const count = panelCountOf(columns);
    this.#pack(columns);
    kernels.solveLowerTransposed(matrix, this.n, panels, panelBytes, count, packed, tile);
    this.#unpack(columns);
  }

  /** `matrix` := (L·Lᵀ)⁻¹ of the factor in it, both triangles. The memory must be laid out for n columns. */
  inverse(): void {
    const { matrix, panels, panelBytes, reciprocal, tile } = this.#layout;
    this.#memory.kernels.inverse(matrix, this.n, panels, panelBytes, reciprocal, tile);
  }

  /** L⁻ᵀ as `inverse` left it: n × n, upper triangle, zeros below. */
  copyTransposedInverseFactor(out: Float64Array): void {
    const { panels, panelBytes } = this.#layout;
    const n = this.n;
    for (let row = 0; row < n; row++) {
      const panel = this.#memory.numbers(panels + (row >> 2) * panelBytes, 4 * n);
      for (let k = 0; k < n; k++) out[row * n + k] = k < row ? 0 : panel[4 * k + (row & 3)];
    }
  }

  #pack(columns: number): void {
    const { block, panels, panelBytes } = this.#layout;
    this.#memory.kernels.packPanels(block, 8 * columns, this.n, columns, panels, panelBytes);
  }

  #unpack(columns: number): void {
    const { block, panels, panelBytes } = this.#layout;
    this.#memory.kernels.unpackPanels(panels, panelBytes, this.n, columns, block, 8 * columns);
  }
}
