import type { KernelSet } from './kernel-set.js';
import { referenceKernels } from './reference/kernel-set.js';

let current: KernelSet = referenceKernels;

/** The implementation all kernels of this thread go through. */
export function currentKernels(): KernelSet {
  return current;
}

/** Chooses the implementation for this thread (tests, benchmarks). */
export function useKernels(name: 'simd' | 'reference'): void {
  current = name === 'reference' ? referenceKernels : current;
}

/** Name of the implementation in use in this thread. */
export function kernelName(): string {
  return current.name;
}
