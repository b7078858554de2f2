import { SUPPORT_FLAGS } from '../../isoscape/index.js';
import { CHECKED, checkTolerance, type GridCheck, type GridResult } from '../../jobs/index.js';
import { nearestNote } from '../nearest-note.js';
import type { GridOptions } from './grid-options.js';

/** What a person is told once a grid is written, one line each. */
export function gridReport(options: GridOptions, result: GridResult, stationTotal: number): string[] {
  const { width, height, counts, files } = result;
  const sizeBytes = files.reduce((sum, { summary }) => sum + summary.sizeBytes, 0);
  const size = sizeBytes < 1e6 ? `${Math.ceil(sizeBytes / 1e3)} kB` : `${(sizeBytes / 1e6).toFixed(1)} MB`;
  const name = files.length === 1 ? files[0]!.path : `${files.length} files beside ${options.outputPath}`;
  const lines = [`${name}: ${width} × ${height} cells, ${counts.predicted} of them with a value (${size})`];
  lines.push(...nodataLines(result), ...result.ground.notes.map((note) => `note: ${note}`));
  lines.push(...doubtLines(options, counts));
  if (counts.impossible > 0) {
    lines.push(
      `${counts.impossible} cells are nodata: their values are beyond what precipitation has, the trend is extrapolated far beyond the stations`,
    );
  }
  if (counts.flagged > 0) {
    const reasons = counts.byFlag.flatMap((cells, bit) =>
      cells > 0 ? `${SUPPORT_FLAGS[bit]} ${cells}` : [],
    );
    lines.push(`${counts.flagged} cells lean on little (${reasons.join(', ')}): read them with care`);
  }
  const { nearestError, check } = result;
  if (nearestError !== null) {
    lines.push(nearestNote(nearestError, stationTotal, 'cells'), ...differenceLines(check));
  } else if (!options.exact) {
    lines.push(...checkLines(options.tolerance, check));
  }
  return lines;
}

/** Answers to what was asked that are hardly what was meant. */
function doubtLines(options: GridOptions, { predicted, byFlag }: GridResult['counts']): string[] {
  const lines: string[] = [];
  if (options.land && options.elevationPath !== null) {
    lines.push(
      `note: --land knows the sea of the bundled elevation grid only; with --elevation land is where that file has a value`,
    );
  }
  if (byFlag[SUPPORT_FLAGS.indexOf('outside-hull')] === predicted) {
    lines.push('note: no cell lies among the stations; are the bounds in the order W,S,E,N?');
  }
  return lines;
}

function nodataLines({ counts, ground }: GridResult): string[] {
  const reasons = [
    [counts.masked, 'not asked for (mask or template)'],
    [counts.sea, 'sea'],
    [counts.offEarth, 'where the CRS does not reach'],
    [counts.withoutElevation, `without elevation in ${ground.elevation}`],
    [
      counts.withoutCovariate,
      `without a value in ${ground.covariates.map(({ source }) => source).join(', ')}`,
    ],
  ] as const;
  const said = reasons.filter(([cells]) => cells > 0).map(([cells, reason]) => `${cells} ${reason}`);
  return said.length === 0 ? [] : [`nodata: ${said.join(', ')}`];
}

/** What the interpolation cost, as found on a sample; more than allowed is a fault of ours and must be said. */
function checkLines(tolerance: number, { cells, largest }: GridCheck): string[] {
  if (cells === 0) return [];
  const lines = [
    `largest error on ${cells} cells computed again exactly: ${largestText(largest)} (per mil; allowed ${tolerance} in d18O, ${checkTolerance('d2H', tolerance)} in d2H and d-excess)`,
  ];
  const beyond = CHECKED.filter((name) => largest[name] > checkTolerance(name, tolerance));
  if (beyond.length > 0) {
    lines.push(
      `WARNING: ${beyond.join(', ')} missed the tolerance: do not rely on this grid to that tolerance; --exact computes every cell`,
    );
  }
  return lines;
}

/**
 * In a large network a cell and a site at the same place leave out different stations: the tolerance, which is about
 * interpolation, does not bound how far they are apart.
 */
function differenceLines({ cells, largest }: GridCheck): string[] {
  if (cells === 0) return [];
  return [
    `largest difference from what sites answers, on ${cells} cells: ${largestText(largest)} (per mil; other stations far away are left out there)`,
  ];
}

function largestText(largest: GridCheck['largest']): string {
  const measured = CHECKED.filter((name) => largest[name] > 0).map(
    (name) => `${name} ${largest[name].toExponential(1)}`,
  );
  return measured.length === 0 ? 'none' : measured.join(', ');
}
