import { COMPILED_KERNELS } from '../compiled.generated.js';
import { type WasmModule, webAssembly } from './web-assembly.js';

/** Functions of ../assembly. Addresses and sizes are bytes, counts are numbers of rows, columns or values. */
export interface CompiledKernels {
  cholesky(a: number, n: number, packed: number, tile: number): number;
  solveLower(
    l: number,
    n: number,
    panels: number,
    panelBytes: number,
    panelCount: number,
    triangular: number,
    reciprocal: number,
    tile: number,
  ): void;
  solveLowerTransposed(
    l: number,
    n: number,
    panels: number,
    panelBytes: number,
    panelCount: number,
    packed: number,
    tile: number,
  ): void;
  inverse(a: number, n: number, panels: number, panelBytes: number, reciprocal: number, tile: number): void;
  multiply(
    a: number,
    rows: number,
    inner: number,
    b: number,
    columns: number,
    out: number,
    panels: number,
    tile: number,
  ): void;
  packPanels(
    from: number,
    stride: number,
    rows: number,
    columns: number,
    panels: number,
    panelBytes: number,
  ): void;
  unpackPanels(
    panels: number,
    panelBytes: number,
    rows: number,
    columns: number,
    to: number,
    stride: number,
  ): void;
  covariance(
    kind: number,
    sill: number,
    rangeKm: number,
    stations: number,
    n: number,
    places: number,
    stride: number,
    count: number,
    out: number,
  ): void;
  correlations(kind: number, rangeKm: number, distances: number, count: number, slopes: number): void;
  exponentials(x: number, count: number): void;
}

let compiled: WasmModule | null | undefined;

/** The module, compiled once a thread; null where the engine has no WebAssembly or the processor no SIMD. */
export function compiledModule(): WasmModule | null {
  if (compiled === undefined) {
    const engine = webAssembly();
    const bytes = Uint8Array.from(atob(COMPILED_KERNELS), (character) => character.charCodeAt(0));
    compiled = engine?.validate(bytes) ? new engine.Module(bytes) : null;
  }
  return compiled;
}
