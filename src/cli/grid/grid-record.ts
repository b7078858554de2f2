import { basename } from 'node:path';
import type { GridResult } from '../../jobs/index.js';
import { isoscapeRecord } from '../isoscape-record.js';
import { nearestErrorRecord } from '../nearest-note.js';
import type { GridCall } from './run-grid.js';

/** What would make the grid again, and prove that nothing was changed. No clock in it: the same run, the same bytes. */
export function gridRecord(call: GridCall, result: GridResult, toolVersion: string): string {
  const { isoscape, isoscapePath, isoscapeSha256, options, request } = call;
  const { ground } = result;
  const record = {
    tool: 'rainprint',
    tool_version: toolVersion,
    verb: 'grid',
    isoscape: isoscapeRecord(isoscape, isoscapePath, isoscapeSha256),
    options: {
      ...frameOptions(options.frame),
      land: options.land,
      target: options.target,
      plug_in: options.plugIn,
      tolerance: options.exact ? null : options.tolerance,
      exact: options.exact,
      bands: result.bands.map(({ name }) => name),
      split: options.split,
      full_precision: options.fullPrecision,
      tile: options.tileSizePx,
    },
    stations: nearestErrorRecord(result.nearestError),
    input: {
      elevation: ground.elevation,
      elevation_bundled: request.ground.seaAtZero,
      covariates: Object.fromEntries(ground.covariates.map(({ name, source }) => [name, source])),
      mask: ground.mask,
      template: ground.template,
    },
    grid: {
      crs: `EPSG:${request.frame.crs.epsg}`,
      width: result.width,
      height: result.height,
      origin: [request.frame.originX, request.frame.originY],
      cell: [request.frame.cellWidth, request.frame.cellHeight],
    },
    cells: cellCounts(result),
    output: result.files.map(({ path, summary }) => ({ file: basename(path), sha256: summary.sha256 })),
  };
  return `${JSON.stringify(record, null, 2)}\n`;
}

function frameOptions({ bounds, cell, crs, like }: GridCall['options']['frame']) {
  return like === undefined ? { bounds, cell, crs: crs ?? 'EPSG:4326' } : { like: basename(like) };
}

function cellCounts({ counts, check }: GridResult) {
  return {
    predicted: counts.predicted,
    impossible: counts.impossible,
    not_asked_for: counts.masked,
    sea: counts.sea,
    off_earth: counts.offEarth,
    without_elevation: counts.withoutElevation,
    without_covariate: counts.withoutCovariate,
    lean_on_little: counts.flagged,
    checked: check.cells,
  };
}
