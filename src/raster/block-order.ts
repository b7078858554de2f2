import { type CogFormat, cogLevels } from './cog-format.js';

export interface BlockPosition {
  readonly blockColumn: number;
  readonly blockRow: number;
}

/**
 * All blocks of a grid in Z-order (Morton 1966): the four children of an overview tile follow each other, at every
 * level. A writer fed in about this order holds back a few blocks a level only, however wide the grid is; fed row by
 * row it holds back about half a row of blocks.
 */
export function* blockOrder(format: CogFormat): Generator<BlockPosition> {
  const { tilesAcross, tilesDown } = cogLevels(format)[0]!;
  const side = 2 ** Math.ceil(Math.log2(Math.max(tilesAcross, tilesDown)));
  yield* quarter(0, 0, side, tilesAcross, tilesDown);
}

function* quarter(
  column: number,
  row: number,
  side: number,
  tilesAcross: number,
  tilesDown: number,
): Generator<BlockPosition> {
  if (column >= tilesAcross || row >= tilesDown) return;
  if (side === 1) {
    yield { blockColumn: column, blockRow: row };
    return;
  }
  const half = side / 2;
  for (const [dx, dy] of [
    [0, 0],
    [half, 0],
    [0, half],
    [half, half],
  ] as const) {
    yield* quarter(column + dx, row + dy, half, tilesAcross, tilesDown);
  }
}
