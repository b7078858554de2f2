import type { StationWithoutCovariate } from '../../jobs/station-covariates.js';
import { shown } from '../../stations/index.js';

/** So many stations are named for each covariate and reason. */
const NAMED_PER_REASON = 20;

const WORDS = { outside: 'outside', nodata: 'on a cell without a value of' } as const;

/** Says which stations a fit left out for want of a covariate, and why; empty where there are none. */
export function covariateNotes(lacking: readonly StationWithoutCovariate[]): string[] {
  if (lacking.length === 0) return [];
  const groups = new Map<string, string[]>();
  for (const { station, covariate, reason, source } of lacking) {
    const key = `${covariate}, ${WORDS[reason]} ${source}`;
    const names = groups.get(key) ?? [];
    groups.set(key, names);
    names.push(`${shown(station.id).slice(1, -1)} (line ${station.line})`);
  }
  const count = new Set(lacking.map(({ station }) => station)).size;
  const reasons = [...groups].map(([key, names]) => {
    const more = names.length > NAMED_PER_REASON ? ` and ${names.length - NAMED_PER_REASON} more` : '';
    return `${key}: ${names.slice(0, NAMED_PER_REASON).join(', ')}${more}`;
  });
  return [`stations left out for want of a covariate: ${count}; ${reasons.join('; ')}`];
}
