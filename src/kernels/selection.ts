import { RainprintError } from '../errors.js';
import type { KernelSet } from './kernel-set.js';
import { referenceKernels } from './reference/kernel-set.js';
import { simdKernels } from './simd/kernel-set.js';

let current: KernelSet | null = null;

/** The implementation all kernels of this thread go through: SIMD where the processor can. */
export function currentKernels(): KernelSet {
  current ??= simdKernels() ?? referenceKernels;
  return current;
}

/**
 * Chooses the implementation for this thread (tests, benchmarks).
 * @throws KERNELS_UNAVAILABLE for 'simd' where the engine or the processor has none
 */
export function useKernels(name: 'simd' | 'reference'): void {
  const chosen = name === 'reference' ? referenceKernels : simdKernels();
  if (chosen === null) {
    throw new RainprintError('KERNELS_UNAVAILABLE', 'this engine has no WebAssembly SIMD; use "reference"', {
      kernels: name,
    });
  }
  current = chosen;
}

/** Name of the implementation in use in this thread. */
export function kernelName(): string {
  return currentKernels().name;
}
