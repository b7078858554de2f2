import { RainprintError } from '../../errors.js';
import { type CompiledKernels, compiledModule } from './compiled-kernels.js';
import { webAssembly } from './web-assembly.js';

const PAGE_BYTES = 65536;
/** 32-bit addresses. */
const MAX_BYTES = 65536 * PAGE_BYTES;
/** Every part starts on a cache line. */
const ALIGNMENT = 64;

/**
 * One WebAssembly memory and the kernels that work in it. Its size never changes: growing a memory would detach every
 * view of it.
 */
export class KernelMemory {
  readonly kernels: CompiledKernels;
  readonly buffer: ArrayBuffer;

  /** @throws MATRIX_TOO_LARGE beyond 4 GB, KERNEL_MEMORY_MISSING where the machine has no more memory */
  constructor(bytes: number) {
    const engine = webAssembly();
    const module = compiledModule();
    if (engine === undefined || module === null) throw new Error('this engine has no WebAssembly SIMD');
    if (!fitsKernelMemory(bytes)) {
      throw new RainprintError(
        'MATRIX_TOO_LARGE',
        `the matrix needs ${(bytes / 2 ** 30).toFixed(1)} GB of memory; at most 4 GB can be used, about 20,000 rows`,
        { bytes },
      );
    }
    const pages = Math.ceil(bytes / PAGE_BYTES);
    try {
      const memory = new engine.Memory({ initial: pages, maximum: pages });
      this.buffer = memory.buffer;
      this.kernels = new engine.Instance(module, { env: { memory } }).exports as CompiledKernels;
    } catch (cause) {
      throw new RainprintError(
        'KERNEL_MEMORY_MISSING',
        `the machine has no further ${(bytes / 2 ** 20).toFixed(0)} MB of memory for the matrices`,
        { bytes, cause: String(cause) },
      );
    }
  }

  get bytes(): number {
    return this.buffer.byteLength;
  }

  numbers(address: number, count: number): Float64Array {
    return new Float64Array(this.buffer, address, count);
  }
}

export function fitsKernelMemory(bytes: number): boolean {
  return bytes <= MAX_BYTES;
}

/** Hands out parts of a memory, one behind the other; `bytes` is then the size needed. */
export class MemoryPlan {
  #bytes = 0;

  /** @returns the address of a part of `count` numbers */
  numbers(count: number): number {
    const address = this.#bytes;
    this.#bytes = Math.ceil((address + 8 * count) / ALIGNMENT) * ALIGNMENT;
    return address;
  }

  get bytes(): number {
    return this.#bytes;
  }
}
