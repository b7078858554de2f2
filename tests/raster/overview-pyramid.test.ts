import { describe, expect, it } from 'vitest';
import { type BlockPosition, blockOrder } from '../../src/raster/block-order.js';
import { type CogFormat, cogLevels } from '../../src/raster/cog-format.js';
import { OverviewPyramid } from '../../src/raster/overview-pyramid.js';
import { format } from './seeded-cog.js';

/**
 * Feeds empty halves in an order and returns, for each level, how many tiles of it waited for their overview at once:
 * they came, and the tile above them had not been made.
 */
async function mostWaiting(f: CogFormat, order: Iterable<BlockPosition>): Promise<number[]> {
  const levels = cogLevels(f);
  const waiting = levels.map(() => 0);
  const most = levels.map(() => 0);
  const came = (level: number) => {
    waiting[level]!++;
    most[level] = Math.max(most[level]!, waiting[level]!);
  };
  const pyramid = new OverviewPyramid(f, levels, async (level, column, row) => {
    const below = levels[level - 1]!;
    const across = Math.min(2, below.tilesAcross - 2 * column);
    waiting[level - 1]! -= across * Math.min(2, below.tilesDown - 2 * row);
    came(level);
  });
  for (const { blockColumn, blockRow } of order) {
    came(0);
    await pyramid.receive(0, blockColumn, blockRow, []);
  }
  expect(waiting.slice(0, -1).every((count) => count === 0)).toBe(true);
  return most.slice(0, -1);
}

function* rowByRow(across: number, down: number): Generator<BlockPosition> {
  for (let k = 0; k < across * down; k++) yield { blockColumn: k % across, blockRow: Math.floor(k / across) };
}

// The worldwide grid of 30″: 43,200 × 21,600 cells, 85 × 43 blocks of 512.
const WORLD = format({ width: 43_200, height: 21_600, tileSizePx: 512 });

describe('OverviewPyramid', () => {
  it('holds back four tiles a level at most in Z-order, whatever the grid', async () => {
    for (const f of [
      WORLD,
      format({ width: 16 * 37, height: 16 * 5, tileSizePx: 16 }),
      format({ width: 3, height: 16 * 99, tileSizePx: 16 }),
    ]) {
      for (const count of await mostWaiting(f, blockOrder(f))) expect(count).toBeLessThanOrEqual(4);
    }
  });

  it('holds back a row of tiles a level and two more, row by row', async () => {
    const [{ tilesAcross, tilesDown }] = cogLevels(WORLD) as [ReturnType<typeof cogLevels>[0]];
    const most = await mostWaiting(WORLD, rowByRow(tilesAcross, tilesDown));
    cogLevels(WORLD)
      .slice(0, -1)
      .forEach((level, k) => {
        expect(most[k]).toBeLessThanOrEqual(level.tilesAcross + 2);
      });
  });
});
