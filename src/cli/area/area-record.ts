import { basename } from 'node:path';
import type { Isoscape } from '../../isoscape/index.js';
import { AREA_POINTS, AREA_STABILITY } from '../../jobs/area-average.js';
import { isoscapeRecord } from '../isoscape-record.js';
import type { AreaSourceNames } from './area-columns.js';
import type { AreaOptions } from './area-options.js';

/** What a run of `area` read, did and wrote: enough to run it again and to prove that nothing was changed. */
export interface AreaRunFacts {
  readonly isoscape: Isoscape;
  readonly isoscapePath: string;
  readonly isoscapeSha256: string;
  readonly areasPath: string;
  readonly areasSha256: string;
  readonly outputSha256: string;
  readonly sources: AreaSourceNames;
  readonly areaCount: number;
  readonly problemCount: number;
  readonly toolVersion: string;
}

/** JSON without a clock in it: the same run gives the same bytes. */
export function areaRecord(facts: AreaRunFacts, options: AreaOptions): string {
  const { isoscape, sources } = facts;
  const record = {
    tool: 'rainprint',
    tool_version: facts.toolVersion,
    verb: 'area',
    isoscape: isoscapeRecord(isoscape, facts.isoscapePath, facts.isoscapeSha256),
    options: {
      target: 'field',
      level: options.level,
      format: options.format,
      plug_in: options.plugIn,
    },
    points: {
      first: AREA_POINTS.first,
      most: AREA_POINTS.most,
      stable_at: AREA_STABILITY,
      elevation_errors: 'independent',
    },
    elevation: { grid: sources.elevation },
    weight: { raster: sources.weight },
    ...(isoscape.covariates.length === 0
      ? {}
      : {
          covariates: isoscape.covariates.map(({ name }, k) => ({ name, source: sources.covariates[k] })),
        }),
    input: {
      file: basename(facts.areasPath),
      sha256: facts.areasSha256,
      areas: facts.areaCount,
      problems: facts.problemCount,
    },
    output: {
      file: options.outputPath === null ? null : basename(options.outputPath),
      sha256: facts.outputSha256,
    },
  };
  return `${JSON.stringify(record, null, 2)}\n`;
}
