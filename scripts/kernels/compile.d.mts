export const sourceFolder: string;
export const compiledPath: string;
export function sourceDigest(sources: ReadonlyMap<string, string>): string;
export function readSources(): Map<string, string>;
export function compiledDigest(): string | null;
export function compileKernels(sources: ReadonlyMap<string, string>): Promise<Uint8Array>;
export function moduleText(digest: string, bytes: Uint8Array): string;
export function buildKernels(): Promise<void>;
