import type { Isoscape } from '../isoscape.js';
import type { Places, Predictions } from '../places.js';
import { prepareIsoscape } from '../predict.js';
import { createExactSurface } from './exact-surface.js';
import { type Difference, LeafEvaluator } from './leaf.js';
import { PointPredictor } from './point-predictor.js';
import { splitTrend } from './rough-trend.js';
import { Scratch } from './scratch.js';
import type { Surface, SurfaceGrid, SurfaceOptions, SurfaceWindow } from './surface.js';
import { systemFacts } from './system-facts.js';
import { quarters, type Tile, tileInWindow, tileKey, tileRect, topTile } from './tile.js';
import { TileCache } from './tile-cache.js';
import { Expander, type TileExpansions } from './tile-expansions.js';
import { anyWanted, wantedIn } from './window-part.js';

/** Widest leaf whose cells may all be evaluated for every node; wider ones need an interpolated difference. */
const PLAIN_LEAF_SIZE = 16;
const MAX_LEAF_SIZE = 256;
/** A cell costs the square of its near stations: with more than this a tile is quartered if it can be. */
const MAX_LEAF_NEAR = 24;
/** Tiles no wider than this are not quartered for their near stations' sake. */
const MIN_LEAF_SIZE = 8;
/**
 * Operations that expanding one system on a tile from its parent costs (measured). It pays where cells × near stations²,
 * which is what a cell costs for each field, is more.
 */
const EXPANSION_OPERATIONS = 75_000;
/** Tiles wider than a window are met again by the windows beside it. */
const CACHE_BYTES = 24 * 2 ** 20;

/** What is known of a tile: its expansions, or that it has none good enough. */
interface KnownTile {
  readonly expansions: TileExpansions | null;
}

/**
 * The near/far surface (docs/adr/0007): a quadtree of tiles. The largest tiles whose caps are small enough are expanded
 * from the stations by solving triangular systems; their quarters are expanded from them without solving any, until
 * few stations are near; then cells are evaluated, near stations exactly and far ones by interpolation. What misses
 * the tolerance at its test points is quartered; what cannot be expanded at all is predicted cell by cell.
 */
export class NearFarSurface implements Surface {
  readonly #grid: SurfaceGrid;
  readonly #expander: Expander;
  readonly #leaves: LeafEvaluator;
  readonly #exact: Surface;
  readonly #nodesPerField: number;
  readonly #tiles = new TileCache<KnownTile>(CACHE_BYTES);

  constructor(isoscape: Isoscape, grid: SurfaceGrid, options: SurfaceOptions) {
    const ready = prepareIsoscape(isoscape, options.plugIn);
    const facts = systemFacts(ready.fields);
    const trend = splitTrend(isoscape);
    const scratch = new Scratch();
    const { tolerance, target } = options;
    const points = new PointPredictor(isoscape, ready, facts, trend, { tolerance, site: target === 'site' });
    this.#grid = grid;
    this.#expander = new Expander(ready, facts, grid.locate, points, scratch);
    this.#leaves = new LeafEvaluator(facts, trend, points, grid.locate, scratch);
    this.#exact = createExactSurface(isoscape, options, 'auto');
    this.#nodesPerField = facts.length / ready.fields.length;
  }

  predictWindow(window: SurfaceWindow, places: Places, wanted: Uint8Array, out: Predictions): void {
    const visit = (tile: Tile, source: TileExpansions | null): void => {
      const part = tileInWindow(tile, window);
      if (part === null || !anyWanted(part, window, wanted)) return;
      const best = this.#bestExpansions(tile, source) ?? source;
      if (best === null && tile.size === 1) {
        this.#exact.predictWindow(window, places, wantedIn(part, window, wanted), out);
        return;
      }
      const leaf = best === null ? null : this.#asLeaf(tile, best);
      if (best === null || leaf === null) for (const quarter of quarters(tile)) visit(quarter, best);
      else this.#leaves.evaluate(part, best, leaf.difference, window, places, wanted, out);
    };
    visit(topTile(this.#grid), null);
  }

  #bestExpansions(tile: Tile, source: TileExpansions | null): TileExpansions | null {
    if (source !== null && !this.#isWorthExpanding(tile, source)) return source;
    const key = tileKey(tile);
    const known = this.#tiles.get(key);
    if (known !== undefined) return known.expansions;
    const rect = tileRect(tile, this.#grid);
    const expansions =
      source === null ? this.#expander.fromStations(rect) : this.#expander.fromParent(rect, source);
    this.#tiles.set(key, { expansions }, 64 + (expansions?.bytes ?? 0));
    return expansions;
  }

  #isWorthExpanding({ size }: Tile, { nearCount }: TileExpansions): boolean {
    if (size < MIN_LEAF_SIZE) return false;
    return nearCount > MAX_LEAF_NEAR || (size * nearCount) ** 2 > EXPANSION_OPERATIONS * this.#nodesPerField;
  }

  /** How the tile is evaluated as a leaf; null where it is better quartered. */
  #asLeaf(tile: Tile, best: TileExpansions): { readonly difference: Difference | null } | null {
    if (tile.size > MAX_LEAF_SIZE) return null;
    if (tile.size > MIN_LEAF_SIZE && best.nearCount > MAX_LEAF_NEAR) return null;
    if (this.#nodesPerField === 1 || tile.size <= MIN_LEAF_SIZE) return { difference: null };
    const difference = this.#leaves.difference(tileRect(tile, this.#grid), best);
    return difference === null && tile.size > PLAIN_LEAF_SIZE ? null : { difference };
  }
}
