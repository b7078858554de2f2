import type { IssueLog } from './issue-log.js';
import type { Network } from './network.js';
import type { StationMeaning } from './station-vocabulary.js';
import type { Table } from './table/index.js';

/** What a reader should know of the network as a whole, in sentences. */
export function networkWarnings(network: Network, table: Table<StationMeaning>, log: IssueLog): string[] {
  const warnings: string[] = [];
  const hasAmounts = table.columns.has('precipitation');
  if (network.fromRecords && !hasAmounts) {
    warnings.push(
      'no precipitation column: every record counts alike (unweighted means), and the share of precipitation analysed is not checked',
    );
  }
  if (network.fromRecords && hasAmounts && log.count('amount-missing') * 2 > network.rowCount) {
    warnings.push(
      'most records have no precipitation amount and were left out; --column precipitation= averages without amounts',
    );
  }
  if (log.count('coordinates-swapped') * 2 > network.rowCount) {
    warnings.push(
      'most rows have longitude and latitude exchanged: name the columns with --column lon= and --column lat=',
    );
  }
  if (network.years !== null && network.season.months[0] > (network.season.months.at(-1) ?? 12)) {
    warnings.push(
      `season ${network.season.label} runs over the new year: a record belongs to the calendar year of its own date`,
    );
  }
  if (looksLikeFractions(network)) {
    warnings.push('every δ value lies close to 0: are they fractions instead of ‰?');
  }
  return warnings;
}

/** Rain everywhere within 0.5 ‰ of zero in δ18O (5 ‰ in δ2H) is unheard of; fractions look like that. */
function looksLikeFractions(network: Network): boolean {
  const stations = network.stations;
  if (stations.length < 3) return false;
  return stations.every((s) => !(Math.abs(s.d18O) > 0.5) && !(Math.abs(s.d2H) > 5));
}
