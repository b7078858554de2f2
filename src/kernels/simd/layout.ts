import { MemoryPlan } from './kernel-memory.js';

/** BLOCK × STRETCH of ../assembly: the packed part of a factor. */
const PACKED_NUMBERS = 64 * 256;
const TILE_NUMBERS = 16;

/** Addresses of what works on an n × n matrix and blocks of up to `width` columns, and the bytes of it all. */
export interface DenseLayout {
  readonly tile: number;
  readonly packed: number;
  readonly reciprocal: number;
  readonly matrix: number;
  readonly block: number;
  readonly panels: number;
  /** Bytes of one panel of four columns. */
  readonly panelBytes: number;
  readonly positions: PositionLayout;
  readonly bytes: number;
}

/** Where positions stand for the covariance kernel. */
export interface PositionLayout {
  readonly stations: number;
  readonly places: number;
  /** Bytes between the places' x, y and z. */
  readonly placeStride: number;
}

export function denseLayout(n: number, width: number): DenseLayout {
  const plan = new MemoryPlan();
  const panelBytes = panelBytesOf(n);
  return {
    tile: plan.numbers(TILE_NUMBERS),
    packed: plan.numbers(PACKED_NUMBERS),
    reciprocal: plan.numbers(n),
    matrix: plan.numbers(n * n),
    block: plan.numbers(n * width),
    panels: plan.numbers((panelBytes / 8) * panelCountOf(width)),
    panelBytes,
    positions: planPositions(plan, n, width),
    bytes: plan.bytes,
  };
}

/** Addresses of a block of covariances alone. */
export interface CovarianceLayout {
  readonly block: number;
  readonly positions: PositionLayout;
  readonly bytes: number;
}

export function covarianceLayout(n: number, count: number): CovarianceLayout {
  const plan = new MemoryPlan();
  const block = plan.numbers(n * count);
  return { block, positions: planPositions(plan, n, count), bytes: plan.bytes };
}

function planPositions(plan: MemoryPlan, n: number, count: number): PositionLayout {
  // One place more: the kernel reads pairs.
  const placeStride = 8 * (count + 1);
  return { stations: plan.numbers(3 * n), places: plan.numbers((3 * placeStride) / 8), placeStride };
}

/** Addresses of a product: A (rows × inner), B (inner × columns) and the result. */
export interface ProductLayout {
  readonly tile: number;
  readonly a: number;
  readonly b: number;
  readonly out: number;
  readonly panels: number;
  readonly bytes: number;
}

export function productLayout(rows: number, inner: number, columns: number): ProductLayout {
  const plan = new MemoryPlan();
  return {
    tile: plan.numbers(TILE_NUMBERS),
    a: plan.numbers(rows * inner),
    b: plan.numbers(inner * columns),
    out: plan.numbers(rows * columns),
    panels: plan.numbers(4 * inner * panelCountOf(columns)),
    bytes: plan.bytes,
  };
}

/** Panels of four columns. */
export function panelCountOf(width: number): number {
  return Math.ceil(width / 4);
}

/** Whole tiles of four rows, and one line more, so that panels of 2^k rows do not meet in the same cache sets. */
function panelBytesOf(n: number): number {
  return 32 * (4 * Math.ceil(n / 4)) + 64;
}
