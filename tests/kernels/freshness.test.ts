// The generated module stands for the sources as they are, and making it again gives the same bytes.
import { describe, expect, it } from 'vitest';
import { compileKernels, readSources, sourceDigest } from '../../scripts/kernels/compile.mjs';
import { COMPILED_DIGEST, COMPILED_KERNELS } from '../../src/kernels/compiled.generated.js';

describe('compiled kernels', () => {
  it('are those of the sources: run `npm run build` where this fails', () => {
    expect(COMPILED_DIGEST).toBe(sourceDigest(readSources()));
  });

  it('come out the same, byte by byte, when compiled again', async () => {
    expect(Buffer.from(await compileKernels(readSources())).toString('base64')).toBe(COMPILED_KERNELS);
  });

  it('a changed, a new and a missing source are all seen', () => {
    const sources = readSources();
    const digest = sourceDigest(sources);
    const [name, text] = [...sources][0]!;
    expect(sourceDigest(new Map([...sources, [name, `${text}\n`]]))).not.toBe(digest);
    expect(sourceDigest(new Map([...sources, ['more.ts', '']]))).not.toBe(digest);
    expect(sourceDigest(new Map([...sources].slice(1)))).not.toBe(digest);
    expect(sourceDigest(new Map([...sources].reverse()))).toBe(digest);
  });
});
