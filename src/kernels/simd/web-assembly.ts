/** The little of the WebAssembly interface that is used here; it is no part of the ES library's types. */
interface WebAssemblyApi {
  validate(bytes: Uint8Array): boolean;
  readonly Module: new (bytes: Uint8Array) => WasmModule;
  readonly Instance: new (
    module: WasmModule,
    imports: { readonly env: { readonly memory: WasmMemory } },
  ) => { readonly exports: unknown };
  readonly Memory: new (limits: { readonly initial: number; readonly maximum: number }) => WasmMemory;
}

export interface WasmModule {
  readonly [Symbol.toStringTag]?: string;
}

export interface WasmMemory {
  readonly buffer: ArrayBuffer;
}

/** The engine's WebAssembly; undefined where it has none. */
export function webAssembly(): WebAssemblyApi | undefined {
  return (globalThis as unknown as { readonly WebAssembly?: WebAssemblyApi }).WebAssembly;
}
