import { basename } from 'node:path';
import type { Command } from 'commander';
import { RainprintError } from '../errors.js';
import {
  type CheckReport,
  type IsotopeChoice,
  type IssueSink,
  type Network,
  type ReadNetworkOptions,
  readNetwork,
} from '../stations/index.js';
import type { CliContext } from './context.js';
import { openInput } from './input-file.js';
import { createProgress } from './progress.js';
import { collected, columnOverrides } from './repeated-options.js';

/** The options of every verb that reads a station table, as commander hands them over. */
export interface StationFlags {
  readonly season?: string;
  readonly years?: string;
  readonly isotope: string;
  readonly column: readonly string[];
  readonly minRecords: string;
  readonly minCoverage: string;
  readonly withinCorrelation: string;
}

const COLUMNS_HELP = `
Columns are found by their headers (English, any case, units such as (m) or (permil) allowed), or
named with --column MEANING=HEADER. The meanings:
  every table        id, name (may be missing), lon, lat (decimal degrees), elevation (m), d18O,
                     d2H (permil; with --isotope d18O or d2H that one alone is enough)
  one row a record   date, or month (1-12) and year; precipitation (mm)
  one row a station  n (number of records), sd_d18O, sd_d2H (standard deviations of records),
                     se_d18O, se_d2H (standard errors of the means), season (such as 4-9)`;

/** Adds those options to a verb, and to its help what a column may mean. */
export function addStationOptions(command: Command): Command {
  return command
    .option(
      '--season <months>',
      'calendar months to average, such as 4-9, 10-3 or 7 (default: the whole year)',
    )
    .option('--years <years>', 'calendar years to average, such as 2005-2019 (default: all)')
    .option('--isotope <choice>', 'both, d18O or d2H', 'both')
    .option(
      '--column <meaning=header>',
      'name a column the tool does not find, such as lat=Breite; may be repeated; MEANING= says there is none',
      collected,
      [],
    )
    .option('--min-records <n>', 'fewest records (or given n) of a station', '12')
    .option('--min-coverage <share>', "least share of the season's precipitation analysed, 0 to 1", '0.7')
    .option('--within-correlation <r>', 'correlation assumed where a table gives standard deviations', '0.98')
    .addHelpText('after', COLUMNS_HELP);
}

/** The flags as options of `readNetwork`. Throws OPTION_INVALID naming the flag. */
export function readStationFlags(flags: StationFlags): ReadNetworkOptions {
  return {
    isotopes: isotopeChoice(flags.isotope),
    columns: columnOverrides(flags.column),
    minRecords: numberFlag('--min-records', flags.minRecords, 1, 100_000),
    minCoverage: numberFlag('--min-coverage', flags.minCoverage, 0, 1),
    withinCorrelation: numberFlag('--within-correlation', flags.withinCorrelation, -0.9999, 0.9999),
    ...(flags.season === undefined ? {} : { season: flags.season }),
    ...(flags.years === undefined ? {} : { years: flags.years }),
  };
}

/** Reads the station table at `path` with a progress line on a terminal; the network takes the file's name. */
export async function readStationFile(
  path: string,
  flags: StationFlags,
  context: CliContext,
  onIssue?: IssueSink,
): Promise<{ network: Network; report: CheckReport }> {
  const options = readStationFlags(flags);
  const source = await openInput(path);
  const progress = createProgress(context, 'reading stations');
  try {
    return await readNetwork(
      source,
      { ...options, name: basename(path), ...(onIssue === undefined ? {} : { onIssue }) },
      (rows, bytes) => progress.update(rows, 0, `${(bytes / 1e6).toFixed(1)} MB, rows`),
    );
  } finally {
    progress.end();
  }
}

function isotopeChoice(text: string): IsotopeChoice {
  if (text === 'both' || text === 'd18O' || text === 'd2H') return text;
  throw new RainprintError('OPTION_INVALID', `--isotope ${text}: expected both, d18O or d2H`, {
    value: text,
  });
}

function numberFlag(flag: string, text: string, min: number, max: number): number {
  const value = text.trim() === '' ? Number.NaN : Number(text);
  if (value >= min && value <= max) return value;
  throw new RainprintError('OPTION_INVALID', `${flag} ${text}: expected a number from ${min} to ${max}`, {
    value: text,
  });
}
