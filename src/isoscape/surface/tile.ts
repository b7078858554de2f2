import type { Rect } from './lattice.js';
import type { SurfaceGrid, SurfaceWindow } from './surface.js';

/** A square of cells of the quadtree over a grid; `size` is a power of two and divides `column` and `row`. */
export interface Tile {
  readonly column: number;
  readonly row: number;
  readonly size: number;
}

/** The smallest tile at the grid's first cell that holds the whole grid. */
export function topTile(grid: SurfaceGrid): Tile {
  return { column: 0, row: 0, size: 2 ** Math.ceil(Math.log2(Math.max(grid.width, grid.height))) };
}

export function quarters({ column, row, size }: Tile): Tile[] {
  const half = size / 2;
  return [0, half].flatMap((down) =>
    [0, half].map((across) => ({ column: column + across, row: row + down, size: half })),
  );
}

export function tileKey({ column, row, size }: Tile): string {
  return `${size}:${column}:${row}`;
}

/** The tile's part of the grid. */
export function tileRect({ column, row, size }: Tile, grid: SurfaceGrid): Rect {
  const width = Math.min(size, grid.width - column);
  return { x: column, y: row, width, height: Math.min(size, grid.height - row) };
}

/** Common part of a tile and a window, null where there is none. */
export function tileInWindow({ column, row, size }: Tile, window: SurfaceWindow): SurfaceWindow | null {
  const firstColumn = Math.max(column, window.firstColumn);
  const firstRow = Math.max(row, window.firstRow);
  const width = Math.min(column + size, window.firstColumn + window.width) - firstColumn;
  const height = Math.min(row + size, window.firstRow + window.height) - firstRow;
  return width > 0 && height > 0 ? { firstColumn, firstRow, width, height } : null;
}
