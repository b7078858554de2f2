import {
  createPredictions,
  HYDROGEN_TOLERANCE_FACTOR,
  type Isoscape,
  type Places,
  type Predictions,
  type PredictOptions,
  pickPlaces,
  predictPlaces,
} from '../isoscape/index.js';
import { dExcess, dExcessVariance } from '../isotope/index.js';
import type { CellWindow } from '../raster/index.js';

/** Largest differences between what was interpolated and what was computed exactly, over a sample of cells, ‰. */
export interface GridCheck {
  cells: number;
  readonly largest: { [name in CheckedName]: number };
}

export const CHECKED = ['d18O', 'd18O_se', 'd2H', 'd2H_se', 'dexcess', 'dexcess_se'] as const;
export type CheckedName = (typeof CHECKED)[number];

const SAMPLE_CELLS = 256;

export function createCheck(): GridCheck {
  return { cells: 0, largest: { d18O: 0, d18O_se: 0, d2H: 0, d2H_se: 0, dexcess: 0, dexcess_se: 0 } };
}

export function addCheck(sum: GridCheck, part: GridCheck): void {
  sum.cells += part.cells;
  for (const name of CHECKED) sum.largest[name] = Math.max(sum.largest[name], part.largest[name]);
}

/** Tolerance of each checked value, ‰. */
export function checkTolerance(name: CheckedName, tolerance: number): number {
  return name.startsWith('d18O') ? tolerance : HYDROGEN_TOLERANCE_FACTOR * tolerance;
}

/** Cells of a grid to be checked: the same for every worker, drawn from the grid's size alone. All of a small grid. */
export function checkedCells(width: number, height: number): readonly { column: number; row: number }[] {
  const count = width * height;
  if (count <= SAMPLE_CELLS) {
    return Array.from({ length: count }, (_, k) => ({ column: k % width, row: Math.floor(k / width) }));
  }
  const random = weyl(width, height);
  const drawn = new Map<number, { column: number; row: number }>();
  while (drawn.size < SAMPLE_CELLS) {
    const column = Math.floor(random() * width);
    const row = Math.floor(random() * height);
    drawn.set(row * width + column, { column, row });
  }
  return [...drawn.values()];
}

/** Numbers in [0, 1) from a Weyl sequence through the 32-bit mixer of MurmurHash3 (Appleby 2011, public domain). */
function weyl(width: number, height: number): () => number {
  let state = Math.imul(width, 0x9e3779b1) ^ Math.imul(height, 0x85ebca77);
  return () => {
    state = (state + 0x9e3779b9) | 0;
    let mixed = Math.imul(state ^ (state >>> 16), 0x85ebca6b);
    mixed = Math.imul(mixed ^ (mixed >>> 13), 0xc2b2ae35);
    return ((mixed ^ (mixed >>> 16)) >>> 0) / 2 ** 32;
  };
}

/** Recomputes the sample's wanted cells of a window exactly. */
export function checkWindow(
  isoscape: Isoscape,
  options: PredictOptions,
  sample: readonly { column: number; row: number }[],
  window: CellWindow,
  cells: { readonly places: Places; readonly wanted: Uint8Array; readonly predictions: Predictions },
): GridCheck {
  const found = sample
    .map(({ column, row }) => ({ x: column - window.firstColumn, y: row - window.firstRow }))
    .filter(({ x, y }) => x >= 0 && y >= 0 && x < window.width && y < window.height)
    .map(({ x, y }) => y * window.width + x)
    .filter((k) => cells.wanted[k] === 1);
  const check = createCheck();
  if (found.length === 0) return check;
  const exact = createPredictions(found.length);
  predictPlaces(isoscape, pickPlaces(cells.places, found), exact, options);
  check.cells = found.length;
  found.forEach((k, i) => {
    const [a, b] = [checkedValues(cells.predictions, k), checkedValues(exact, i)];
    for (const name of CHECKED) {
      // One isotope's isoscape has no other: NaN differs from NaN by nothing
      const apart = Math.abs(a[name] - b[name]);
      if (apart > check.largest[name]) check.largest[name] = apart;
    }
  });
  return check;
}

function checkedValues(from: Predictions, k: number): { [name in CheckedName]: number } {
  const se = (variance: number) => Math.sqrt(Math.max(0, variance));
  const [d18O, d2H, varO, varH] = [from.d18O[k]!, from.d2H[k]!, from.varD18O[k]!, from.varD2H[k]!];
  return {
    d18O,
    d18O_se: se(varO),
    d2H,
    d2H_se: se(varH),
    dexcess: dExcess(d18O, d2H),
    dexcess_se: se(dExcessVariance(varO, from.cov[k]!, varH)),
  };
}
