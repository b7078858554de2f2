import { createHash } from 'node:crypto';
import { basename } from 'node:path';
import type { Isoscape, NearestError } from '../../isoscape/index.js';
import type { ColumnOverrides } from '../../stations/index.js';
import { isoscapeRecord } from '../isoscape-record.js';
import { nearestErrorRecord } from '../nearest-note.js';
import type { SitesOptions } from './sites-options.js';

/** What a run of `sites` read, did and wrote: enough to run it again and to prove that nothing was changed. */
export interface RunFacts {
  readonly isoscape: Isoscape;
  readonly isoscapePath: string;
  readonly isoscapeSha256: string;
  readonly sitesPath: string;
  readonly sitesSha256: string;
  readonly outputSha256: string;
  readonly columns: ColumnOverrides;
  /** The grid elevations were looked up in; null where the table had them all. */
  readonly elevationGrid: string | null;
  /** The rasters covariates were looked up in. */
  readonly covariateRasters: readonly { readonly name: string; readonly source: string }[];
  /** Null where all stations entered every prediction. */
  readonly nearestError: NearestError | null;
  readonly siteCount: number;
  readonly problemCount: number;
  readonly toolVersion: string;
}

/** JSON without a clock in it: the same run gives the same bytes. */
export function runRecord(facts: RunFacts, options: SitesOptions): string {
  const { isoscape } = facts;
  const record = {
    tool: 'rainprint',
    tool_version: facts.toolVersion,
    verb: 'sites',
    isoscape: isoscapeRecord(isoscape, facts.isoscapePath, facts.isoscapeSha256),
    options: {
      target: options.target,
      level: options.level,
      format: options.format,
      plug_in: options.plugIn,
      columns: facts.columns,
    },
    elevation: { table_first: true, grid: facts.elevationGrid },
    ...(isoscape.covariates.length === 0
      ? {}
      : { covariates: { table_first: true, rasters: facts.covariateRasters } }),
    stations: nearestErrorRecord(facts.nearestError),
    input: {
      file: basename(facts.sitesPath),
      sha256: facts.sitesSha256,
      sites: facts.siteCount,
      problems: facts.problemCount,
    },
    output: {
      file: options.outputPath === null ? null : basename(options.outputPath),
      sha256: facts.outputSha256,
    },
  };
  return `${JSON.stringify(record, null, 2)}\n`;
}

/** Passes chunks on and hashes them; `digest` once they have all passed. */
export function hashed(source: AsyncIterable<Uint8Array>): {
  readonly chunks: AsyncIterable<Uint8Array>;
  digest(): Promise<string>;
} {
  const hash = createHash('sha256');
  const iterator = source[Symbol.asyncIterator]();
  const next = async () => {
    const step = await iterator.next();
    if (step.done !== true) hash.update(step.value);
    return step;
  };
  return {
    chunks: {
      [Symbol.asyncIterator]: () => ({ next, return: async () => ({ done: true, value: undefined }) }),
    },
    async digest() {
      // A reader may stop before the last byte (blank lines at the end): the hash is of the whole file all the same.
      while ((await next()).done !== true);
      return hash.digest('hex');
    },
  };
}
