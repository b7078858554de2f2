import type { DenseWorkspace } from '../kernel-set.js';
import { DenseMemory } from './dense-memory.js';
import { KernelMemory } from './kernel-memory.js';
import { denseLayout } from './layout.js';

/** Workspaces by their memory, so that a kernel writing into a workspace's block need not copy. */
const byMemory = new WeakMap<ArrayBufferLike, DenseMemory>();

/** See `createDenseWorkspace` of ../dense.ts. @throws MATRIX_TOO_LARGE, KERNEL_MEMORY_MISSING */
export function createDenseWorkspace(n: number, width: number): DenseWorkspace {
  return workspaceIn(new KernelMemory(denseLayout(n, width).bytes), n, width);
}

/** A workspace laid out in a memory that is there already. */
export function workspaceIn(memory: KernelMemory, n: number, width: number): DenseWorkspace {
  const dense = new DenseMemory(memory, n, width);
  byMemory.set(memory.buffer, dense);
  return {
    n,
    width,
    matrix: dense.matrix,
    block: dense.block(width),
    cholesky: () => dense.cholesky(),
    solveLower: (columns) => dense.solveLower(columns),
    solveLowerTransposed: (columns) => dense.solveLowerTransposed(columns),
  };
}

/** The workspace whose memory `view` looks into; undefined for an array of its own. */
export function workspaceOf(view: Float64Array): DenseMemory | undefined {
  return byMemory.get(view.buffer);
}
