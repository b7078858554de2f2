import { afterAll, beforeAll, describe } from 'vitest';
import { kernelName, useKernels } from '../../src/kernels/index.js';

export const IMPLEMENTATIONS = ['simd', 'reference'] as const;
export type Implementation = (typeof IMPLEMENTATIONS)[number];

/** One suite for every implementation of the kernels. */
export function describeKernels(title: string, suite: (name: Implementation) => void): void {
  describe.each(IMPLEMENTATIONS)(`${title} (%s)`, (name) => {
    const before = kernelName() as Implementation;
    beforeAll(() => useKernels(name));
    afterAll(() => useKernels(before));
    suite(name);
  });
}

/** The same call through both, for comparison. */
export function withBoth<T>(call: () => T): { simd: T; reference: T } {
  const before = kernelName() as Implementation;
  try {
    useKernels('simd');
    const simd = call();
    useKernels('reference');
    return { simd, reference: call() };
  } finally {
    useKernels(before);
  }
}
