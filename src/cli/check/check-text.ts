import {
  type CheckReport,
  KEPT_PER_REASON,
  type ReasonSummary,
  type StationIssue,
  shown,
  type WithinSummary,
  withoutControls,
} from '../../stations/index.js';
import { decimals, textTable } from '../text-table.js';

/** The summary a person reads: what was read and how, what is known, what was left out and why. */
export function checkText(report: CheckReport): string {
  const facts = textTable(
    [],
    factRows(report).map(([name, fact]) => [name, withoutControls(fact)]),
    {
      align: ['left', 'left'],
    },
  );
  const warnings = report.warnings.map((warning) => `Note: ${withoutControls(warning)}\n`).join('');
  const alone = oneIsotopeText(report);
  if (report.reasons.length === 0) return `${facts}${warnings}${alone}\nNothing was left out or flagged.\n`;
  const table = textTable(
    ['reason', 'left out', 'flagged', 'counts', 'the row or station'],
    report.reasons.map((r) => [
      r.reasonCode,
      String(r.leftOut),
      String(r.flagged),
      whatIsCounted(r),
      r.meaning,
    ]),
    { align: ['left', 'right', 'right', 'left', 'left'] },
  );
  return `${facts}${warnings}${alone}\n${table}${COUNTS_NOTE}${report.reasons.map(reasonText).join('')}`;
}

const COUNTS_NOTE =
  'A row can have several reasons, so the rows left out may be fewer than the sum of their reasons.\n';

function whatIsCounted({ leftOut, flagged, ofStations }: ReasonSummary): string {
  const ofRows = leftOut + flagged - ofStations;
  if (ofRows === 0) return 'stations';
  return ofStations === 0 ? 'rows' : `${ofRows} rows, ${ofStations} stations`;
}

function factRows(report: CheckReport): [string, string][] {
  const { counts, table, thresholds } = report;
  const rows: [string, string][] = [
    ['Network', report.name],
    ['Stations', stationsText(report)],
    ['Rows', rowsText(counts)],
    ['Read as', readAsText(table)],
    [
      'Columns',
      Object.entries(table.columns)
        .map(([meaning, header]) => `${meaning} = ${shown(header)}`)
        .join(', '),
    ],
  ];
  if (table.unusedColumns.length > 0) rows.push(['Not used', table.unusedColumns.map(shown).join(', ')]);
  rows.push(['Season', `${report.season}${yearsText(report)}`]);
  rows.push(['Means', meansText(report)]);
  rows.push(['Sampling', report.sampling.note]);
  if (report.sampling.within !== null) rows.push(['S', withinText(report.sampling.within, report)]);
  if (report.sampling.withinTotal !== null)
    rows.push(['S_total', withinText(report.sampling.withinTotal, report)]);
  // Nothing was asked of a table of means that does not say how many records are behind each.
  if (report.layout === 'means' && table.columns.n === undefined) return rows;
  const share =
    report.averaging === 'amount-weighted' ? `, ${100 * thresholds.minCoverage} % of precipitation` : '';
  rows.push(['Asked', `at least ${thresholds.minRecords} records a station${share}`]);
  return rows;
}

function stationsText({ counts }: CheckReport): string {
  const one = counts.stationsOneIsotope > 0 ? `, ${counts.stationsOneIsotope} with one isotope only` : '';
  return `${counts.stationsUsed} used of ${counts.stations}: ${counts.stationsLeftOut} left out${one}`;
}

function rowsText(counts: CheckReport['counts']): string {
  const parts = [
    `${counts.rows} read`,
    `${counts.rowsAveraged} averaged`,
    `${counts.rowsLeftOut} left out`,
    ...(counts.rowsOfStationsNotUsed > 0
      ? [`${counts.rowsOfStationsNotUsed} of stations left out or with one isotope`]
      : []),
    ...(counts.rowsOutsideSeason > 0 ? [`${counts.rowsOutsideSeason} of other seasons`] : []),
    ...(counts.rowsOutsideYears > 0 ? [`${counts.rowsOutsideYears} of other years`] : []),
    ...(counts.rowsDry > 0 ? [`${counts.rowsDry} without rain`] : []),
  ];
  return parts.join(', ');
}

function readAsText(table: CheckReport['table']): string {
  if (table.format === 'geojson') return `GeoJSON points, ${table.encoding}`;
  return `CSV, ${table.delimiter} between cells, decimal ${table.decimal}, ${table.encoding}`;
}

function yearsText({ years }: CheckReport): string {
  return years === null ? ', all years' : `, years ${years.from} to ${years.to}`;
}

function meansText(report: CheckReport): string {
  const isotopes = report.isotopes === 'both' ? 'δ18O and δ2H together' : report.isotopes;
  if (report.averaging === 'given') return `${isotopes}, as the table gives them (one row a station)`;
  return `${isotopes}, ${report.averaging} over records (one row a record)`;
}

function withinText(within: WithinSummary, { isotopes }: CheckReport): string {
  if (isotopes === 'd18O') return `SD of a record ${decimals(within.sdD18O, 2)} ‰`;
  if (isotopes === 'd2H') return `SD of a record ${decimals(within.sdD2H, 1)} ‰`;
  const sds = `SD of a record ${decimals(within.sdD18O, 2)} ‰ (δ18O), ${decimals(within.sdD2H, 1)} ‰ (δ2H)`;
  return `${sds}, correlation ${decimals(within.correlation, 3)}, slope ${decimals(within.slope, 2)}`;
}

function oneIsotopeText({ oneIsotopeStations }: CheckReport): string {
  if (oneIsotopeStations.length === 0) return '';
  const names = oneIsotopeStations.slice(0, KEPT_PER_REASON).map(({ id, has }) => `${shown(id)} (${has})`);
  const more = oneIsotopeStations.length - names.length;
  return `Stations with one isotope: ${names.join(', ')}${more > 0 ? ` and ${more} more` : ''}\n`;
}

function reasonText(reason: ReasonSummary): string {
  const total = reason.leftOut + reason.flagged;
  const head = `\n${reason.reasonCode} (${total}): the row or station ${reason.meaning}\n`;
  const rows = textTable([], reason.first.map(issueCells), { align: ['left', 'left', 'left'], indent: 2 });
  const more = total - reason.first.length;
  return head + rows + (more > 0 ? `  and ${more} more (--list FILE writes all)\n` : '');
}

function issueCells(issue: StationIssue): string[] {
  const where = issue.column === '' ? '' : `, column ${shown(issue.column)}`;
  const value = issue.value === '' ? '' : ` ${shown(issue.value)}`;
  return [`line ${issue.line}`, `${shown(issue.stationId)}${where}${value}`, withoutControls(issue.message)];
}
