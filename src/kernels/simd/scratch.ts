import { KernelMemory } from './kernel-memory.js';

/** A larger memory is let go after its call: a fit of thousands of stations must not hold it through a prediction. */
const KEPT_BYTES = 256 * 2 ** 20;

let kept: KernelMemory | null = null;

/**
 * This thread's memory for calls on plain arrays, at least `bytes` large, with unspecified contents. A call copies
 * in, computes and copies out before anyone else may ask for it.
 */
export function scratchMemory(bytes: number): KernelMemory {
  if (kept !== null && kept.bytes >= bytes) return kept;
  // Half as much again: callers whose sizes grow step by step do not make a memory each.
  const memory = new KernelMemory(bytes <= KEPT_BYTES / 2 ? 1.5 * bytes : bytes);
  if (memory.bytes <= KEPT_BYTES) kept = memory;
  return memory;
}
