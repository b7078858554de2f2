import type { Command } from 'commander';
import { RainprintError } from '../errors.js';
import type { CheckReport } from '../stations/index.js';
import { checkText } from './check/check-text.js';
import { IssueList } from './check/issue-list.js';
import type { CliContext } from './context.js';
import { addStationOptions, readStationFile, type StationFlags } from './station-options.js';
import { writeText } from './stream-write.js';

const HELP = `
Reads a station table (CSV with a header, or GeoJSON points; one row a station or one row a
record) and prints what was read, which stations remain, and every reason for which a row or
station was left out or flagged, with its first 50 rows. Exits 2 if fewer than 10 stations remain.

Examples:
  rainprint check stations.csv
  rainprint check records.csv --season 4-9 --years 2005-2019 --list left-out.csv
  rainprint check stationen.csv --column lat=Breite --column lon=Länge --json`;

interface CheckFlags extends StationFlags {
  readonly json?: boolean;
  readonly list?: string;
}

/** `rainprint check`: is a station table fit to be used, and what is wrong with its rows? */
export function registerCheck(program: Command, context: CliContext): void {
  addStationOptions(
    program
      .command('check')
      .description('read a station table, average it, and list every row left out or flagged with the reason')
      .argument('<stations>', 'station table (CSV or GeoJSON points)'),
  )
    .option('--json', 'print the report as JSON')
    .option('--list <file>', 'write every row left out or flagged to this CSV')
    .addHelpText('after', HELP)
    .action((path: string, flags: CheckFlags) => runCheck(path, flags, context));
}

async function runCheck(path: string, flags: CheckFlags, context: CliContext): Promise<void> {
  const report = await readWithList(path, flags, context);
  await writeText(
    context.stdout,
    flags.json === true ? `${JSON.stringify(report, null, 2)}\n` : checkText(report),
  );
  assertUsable(report);
}

async function readWithList(path: string, flags: CheckFlags, context: CliContext): Promise<CheckReport> {
  if (flags.list === undefined) return (await readStationFile(path, flags, context)).report;
  const list = await IssueList.open(flags.list, [path]);
  try {
    const { report } = await readStationFile(path, flags, context, (issue) => list.add(issue));
    await list.commit();
    return report;
  } finally {
    await list.abort();
  }
}

function assertUsable(report: CheckReport): void {
  if (report.usable) return;
  const { stationsUsed, stations } = report.counts;
  throw new RainprintError(
    'STATIONS_TOO_FEW',
    `${stationsUsed} of ${stations} stations can be used; at least ${report.thresholds.minStations} are needed`,
    { stationsUsed, minStations: report.thresholds.minStations },
  );
}
