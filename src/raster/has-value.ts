import type { RasterBlocks } from './raster-blocks.js';

/** Stops at the first block with a value, looking in an order that jumps over the whole raster. */
export async function hasValue(blocks: RasterBlocks): Promise<boolean> {
  const count = blocks.blocksAcross * blocks.blocksDown;
  const step = coprimeStep(count);
  for (let n = 0, k = count >> 1; n < count; n++, k = (k + step) % count) {
    const block = await blocks.readBlock(k % blocks.blocksAcross, Math.floor(k / blocks.blocksAcross));
    if (block.some((value) => !Number.isNaN(value))) return true;
  }
  return false;
}

/** Near the golden section of `count` and without a common divisor, so that every block comes up once. */
function coprimeStep(count: number): number {
  const gcd = (a: number, b: number): number => (b === 0 ? a : gcd(b, a % b));
  let step = Math.max(1, Math.round(count * 0.618));
  while (gcd(step, count) !== 1) step++;
  return step;
}
