import {
  type CheckReport,
  type Network,
  type ReasonSummary,
  shown,
  withoutControls,
} from '../../stations/index.js';

/** So many stations are named for each reason. */
const NAMED_PER_REASON = 5;

/** What a fit says of the table it read: what was left out, which stations it kept in spite of a flag, and warnings. */
export function readingNotes(report: CheckReport, network: Network, path: string): string[] {
  const see = `see them with: rainprint check ${path}`;
  const notes: string[] = [];
  const leftOut = report.reasons.filter((reason) => reason.leftOut > 0);
  if (leftOut.length > 0) {
    const list = leftOut.map((reason) => `${reason.reasonCode} ${reason.leftOut}`).join(', ');
    notes.push(`rows or stations left out: ${list}; ${see}`);
  }
  const used = new Set(network.stations.map((station) => station.id));
  const kept = report.reasons.flatMap((reason) => keptText(reason, used) ?? []);
  if (kept.length > 0) notes.push(`kept although flagged: ${kept.join('; ')}; ${see}`);
  if (hasHalfASpread(report)) notes.push(withoutControls(report.sampling.note));
  return [...notes, ...report.warnings];
}

/** `coordinates-perhaps-swapped R6 (line 412), …`; null where no station of the network has that flag. */
function keptText(
  { reasonCode, first, leftOut, flagged }: ReasonSummary,
  used: ReadonlySet<string>,
): string | null {
  const lines = new Map<string, number>();
  for (const { stationId, line, severity } of first) {
    if (severity === 'flagged' && used.has(stationId) && !lines.has(stationId)) lines.set(stationId, line);
  }
  if (lines.size === 0) return null;
  const named = [...lines].slice(0, NAMED_PER_REASON);
  const list = named.map(([id, line]) => `${shown(id).slice(1, -1)} (line ${line})`).join(', ');
  // Only the first issues of a reason are held: beyond them no number can be told.
  const more = leftOut + flagged > first.length ? ' and others' : '';
  const counted = lines.size > named.length ? ` and ${lines.size - named.length} more` : '';
  return `${reasonCode} ${list}${more === '' ? counted : more}`;
}

/** Some column of a spread was found and yet no sampling error could be made of it: likely a header not recognised. */
function hasHalfASpread({ sampling, table, layout }: CheckReport): boolean {
  if (layout !== 'means' || sampling.knowledge.kind !== 'none') return false;
  const { columns } = table;
  return [columns.sd_d18O, columns.sd_d2H, columns.se_d18O, columns.se_d2H].some(
    (name) => name !== undefined,
  );
}
