import type { Isoscape, NearestError } from '../isoscape/index.js';
import { type GridBand, SUPPORT_BITS } from './grid-bands.js';
import { CHECKED, checkTolerance, type GridCheck } from './grid-check.js';
import { type GridRounding, roundingText } from './grid-rounding.js';
import type { GroundNames } from './grid-sources.js';
import type { GridRequest } from './make-grid.js';

/** What is known of a grid once its blocks are made. */
export interface GridFacts {
  readonly check: GridCheck;
  /** Null where all stations enter every cell. */
  readonly nearestError: NearestError | null;
  readonly ground: GroundNames;
  readonly rounding: GridRounding | null;
  readonly bands: readonly GridBand[];
}

/** What someone who finds the file needs to know, as metadata items of the file. */
export function gridItems(
  isoscape: Isoscape,
  request: GridRequest,
  facts: GridFacts,
): Record<string, string> {
  const { ground, rounding, bands } = facts;
  const { target, plugIn, toolVersion } = request;
  return {
    isoscape_id: isoscape.id,
    network: isoscape.networkName,
    stations: String(isoscape.stations.id.length),
    ...stationItems(facts.nearestError),
    season: isoscape.season.label,
    target,
    parameters: plugIn ? 'plug-in' : 'averaged',
    ...accuracyItems(isoscape, request, facts),
    rounding: request.fullPrecision ? 'none: full precision' : roundingText(rounding),
    elevation_source: ground.elevation,
    sea: seaText(request),
    ...Object.fromEntries(ground.covariates.map(({ name, source }) => [`covariate_${name}`, source])),
    ...(ground.mask === null ? {} : { mask: ground.mask }),
    ...(ground.template === null ? {} : { template: ground.template }),
    ...(bands.some(({ name }) => name === 'support') ? { support_bits: SUPPORT_BITS } : {}),
    tool_version: toolVersion,
    caution:
      "Predictions lean on the stations: far from them, or beyond their elevations and latitudes, the standard errors are a model's word only.",
  };
}

/** Which stations enter a cell; where not all, what that was found to cost at places near stations. */
function stationItems(error: NearestError | null): Record<string, string> {
  if (error === null) return { stations_used: 'all' };
  const { stationCount, reference, placeCount } = error;
  const largest = Object.entries(error.largest).flatMap(([name, { meanPerMil, sePerMil }]) => [
    [`nearest_largest_error_${name}`, meanPerMil.toPrecision(3)],
    [`nearest_largest_error_${name}_se`, sePerMil.toPrecision(3)],
  ]);
  return {
    stations_used: `${stationCount} or more around each cell for its residual, all for the trend`,
    nearest_compared: `the ${stationCount} nearest with ${reference}, at ${placeCount} places near stations`,
    ...Object.fromEntries(largest),
  };
}

/** How far interpolated cells may be, and were found to be, from cells computed exactly. */
function accuracyItems(
  isoscape: Isoscape,
  { exact, tolerance }: GridRequest,
  { check, nearestError }: GridFacts,
): Record<string, string> {
  if (exact) return { tolerance: '0 (every cell computed exactly)' };
  const { isotopes } = isoscape;
  const checked = CHECKED.filter((name) => isotopes === 'both' || name.split('_')[0] === isotopes);
  // A site's nearest stations are others than those around a tile: what they answer differs by more than interpolation
  const compared = nearestError === null ? 'largest_error' : 'largest_difference_from_sites';
  const largest = checked.map((name) => [`${compared}_${name}`, check.largest[name].toPrecision(3)]);
  return {
    tolerance: `${tolerance} permil in d18O and its error, ${checkTolerance('d2H', tolerance)} permil in d2H, d-excess and theirs`,
    checked_cells: String(check.cells),
    ...Object.fromEntries(largest),
  };
}

function seaText({ ground }: GridRequest): string {
  if (ground.landOnly && ground.seaAtZero) return 'nodata';
  return ground.seaAtZero ? 'predicted at 0 m' : 'nodata where the elevations have no value';
}
