import { z } from 'zod';
import { RainprintError } from '../errors.js';
import type { IssueSink } from './issue-log.js';
import type { IsotopeChoice, Season } from './network.js';
import { parseSeason, parseYears, WHOLE_YEAR, type YearRange } from './season.js';

export interface ReadNetworkOptions {
  /** Name of the network (default `network`). */
  readonly name?: string;
  readonly format?: 'csv' | 'geojson' | 'auto';
  /** Default `both`. */
  readonly isotopes?: IsotopeChoice;
  /** `4-9`, `10-3`, `7`; default the whole year, or the one season a table of means has. */
  readonly season?: string;
  /** `2005-2019`, inclusive; for records with years. */
  readonly years?: string;
  /** Columns named by the user: meaning → header; an empty header says there is no such column. */
  readonly columns?: Readonly<Record<string, string>>;
  /** Fewest records (or given n) a station may have: default 12, common practice. */
  readonly minRecords?: number;
  /** Least share of the season's precipitation analysed: default 0.7, common practice. */
  readonly minCoverage?: number;
  /** Within-station correlation of δ18O and δ2H assumed for tables of means with SDs: default 0.98, common practice. */
  readonly withinCorrelation?: number;
  /** Longest line in bytes (default 1 MiB). */
  readonly maxLineBytes?: number;
  /** Called for every issue as it is found (a promise makes the reading wait); the report keeps the first 50 of each reason. */
  readonly onIssue?: IssueSink;
}

/** Options checked and with their defaults. */
export interface ReadSettings {
  readonly name: string;
  readonly format: 'csv' | 'geojson' | 'auto';
  readonly isotopes: IsotopeChoice;
  /** null where the user did not ask for one. */
  readonly askedSeason: Season | null;
  readonly season: Season;
  readonly years: YearRange | null;
  readonly columns: Readonly<Record<string, string>>;
  readonly minRecords: number;
  readonly minCoverage: number;
  readonly withinCorrelation: number;
  readonly maxLineBytes: number | undefined;
}

const Options = z.strictObject({
  name: z.string().min(1).max(1000).default('network'),
  format: z.enum(['csv', 'geojson', 'auto']).default('auto'),
  isotopes: z.enum(['both', 'd18O', 'd2H']).default('both'),
  season: z.string().optional(),
  years: z.string().optional(),
  columns: z.record(z.string(), z.string()).default({}),
  minRecords: z.number().min(1).max(100_000).default(12),
  minCoverage: z.number().min(0).max(1).default(0.7),
  withinCorrelation: z.number().gt(-1).lt(1).default(0.98),
  maxLineBytes: z
    .number()
    .int()
    .min(100)
    .max(1 << 30)
    .optional(),
  onIssue: z.custom<IssueSink>((value) => typeof value === 'function').optional(),
});

/** @throws OPTION_INVALID, SEASON_INVALID, YEARS_INVALID */
export function checkOptions(options: ReadNetworkOptions): ReadSettings {
  const parsed = Options.safeParse(options);
  if (!parsed.success) {
    const issue = parsed.error.issues[0];
    const option = issue.path.join('.') || 'options';
    throw new RainprintError('OPTION_INVALID', `option ${option}: ${issue.message}`, { option });
  }
  const { season, years, onIssue: _sink, maxLineBytes, ...rest } = parsed.data;
  const askedSeason = season === undefined ? null : parseSeason(season);
  return {
    ...rest,
    maxLineBytes,
    askedSeason,
    season: askedSeason ?? WHOLE_YEAR,
    years: years === undefined ? null : parseYears(years),
  };
}
