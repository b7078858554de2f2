/**
 * What cells of a frame cover along one axis of a raster whose axes run the same way, in raster cells: as many cells
 * as `first` is long, `span` raster cells each.
 */
export interface AxisFootprints {
  readonly count: number;
  /** 1 where the cell's centre lies inside the raster. */
  readonly inside: Uint8Array;
  /** First raster cell of the cell's span; may lie outside the raster. */
  readonly first: Int32Array;
  readonly span: number;
  /** count × span: length shared with the box that is averaged, at least one raster cell long; 0 outside the raster. */
  readonly meanWeight: Float64Array;
  /** count × span: length shared with the cell itself; 0 outside the raster. */
  readonly ownWeight: Float64Array;
  /** Sum of a cell's own weights. */
  readonly ownLength: Float64Array;
  /** First and last raster cell whose spread is looked at: centres inside the cell, and the neighbours of its centre. */
  readonly spreadFirst: Int32Array;
  readonly spreadLast: Int32Array;
}

/** In cells: far below any size that matters, far above the rounding of degrees divided by cell sizes. */
export const ROUNDING_CELLS = 1e-9;

/**
 * @param centres positions of the cells' centres, raster cells from the raster's edge
 * @param cellLength length of a cell in raster cells
 * @param size of the raster along the axis; @param goesRound whether it has no edges along the axis
 */
export function axisFootprints(
  centres: Float64Array,
  cellLength: number,
  size: number,
  goesRound: boolean,
): AxisFootprints {
  const count = centres.length;
  const meanLength = Math.max(1, cellLength);
  const span = Math.max(4, Math.ceil(meanLength) + 3);
  const axis = {
    count,
    inside: new Uint8Array(count),
    first: new Int32Array(count),
    span,
    meanWeight: new Float64Array(count * span),
    ownWeight: new Float64Array(count * span),
    ownLength: new Float64Array(count),
    spreadFirst: new Int32Array(count),
    spreadLast: new Int32Array(count),
  };
  for (let k = 0; k < count; k++) {
    const centre = centres[k];
    const [first, last] = spreadRange(centre, cellLength);
    axis.spreadFirst[k] = first;
    axis.spreadLast[k] = last;
    axis.first[k] = Math.min(first, Math.floor(centre - meanLength / 2 + ROUNDING_CELLS));
    axis.inside[k] = Number(goesRound || (centre >= 0 && centre < size));
    for (let i = 0; i < span; i++) {
      const cell = axis.first[k] + i;
      if (!goesRound && (cell < 0 || cell >= size)) continue;
      axis.meanWeight[k * span + i] = sharedLength(cell, centre, meanLength);
      axis.ownWeight[k * span + i] = sharedLength(cell, centre, cellLength);
      axis.ownLength[k] += axis.ownWeight[k * span + i];
    }
  }
  return axis;
}

/** A position on a border belongs to the cell to its right or below, however it was rounded. */
export function cellIndex(position: number): number {
  return Math.floor(position + ROUNDING_CELLS);
}

/** First and last raster cell whose centre lies in the box, the neighbours of the box's centre included. */
export function spreadRange(centre: number, length: number): [number, number] {
  const own = cellIndex(centre);
  return [
    Math.min(own - 1, Math.ceil(centre - length / 2 - 0.5 - ROUNDING_CELLS)),
    Math.max(own + 1, Math.ceil(centre + length / 2 - 0.5 - ROUNDING_CELLS) - 1),
  ];
}

function sharedLength(cell: number, centre: number, length: number): number {
  const shared = Math.min(cell + 1, centre + length / 2) - Math.max(cell, centre - length / 2);
  return shared > ROUNDING_CELLS ? shared : 0;
}
