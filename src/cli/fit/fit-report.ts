import type { Effect, IsotopeEffects } from '../../isoscape/effects.js';
import { decimals, significant, textTable } from '../text-table.js';
import type { FitSummary } from './fit-summary.js';

const LABELS: Readonly<Record<string, string>> = {
  d18O: 'δ18O',
  d2H: 'δ2H',
  dexcess: 'd-excess',
  isoscape: 'isoscape',
  mean: 'mean',
  regression: 'regression only',
  nearest: 'nearest station',
};

/** The table `fit` ends with, for a person to read. */
export function fitReport(summary: FitSummary): string {
  return [
    stationLines(summary),
    effectLines(summary),
    fieldLines(summary),
    axesLines(summary),
    scoreLines(summary),
    trendLines(summary),
    familyLines(summary),
    noteLines(summary),
  ]
    .filter((part) => part !== '')
    .join('\n');
}

function stationLines(summary: FitSummary): string {
  const { isoscape, stationsOfOneIsotope } = summary;
  const years = isoscape.years === null ? 'all years' : `${isoscape.years.from}-${isoscape.years.to}`;
  const lacking = stationsOfOneIsotope > 0 ? `, ${stationsOfOneIsotope} with one isotope only` : '';
  return (
    `Isoscape ${isoscape.id.slice(0, 12)} of network ${isoscape.networkName}, months ${isoscape.season.label}, ${years}\n` +
    `Stations: ${summary.stationsUsed} used, ${summary.stationsLeftOut} left out${lacking}\n` +
    samplingLine(summary)
  );
}

const SAMPLING_SOURCES = {
  records: 'known from the records',
  'standard-deviations': 'from the standard deviations of the table',
  none: 'not known',
} as const;

function samplingLine({ isoscape }: FitSummary): string {
  const { sampling, samplingScale, samplingScaleFitted } = isoscape;
  const scale =
    sampling.kind === 'none'
      ? ''
      : `, scale ${significant(samplingScale, 3)}${samplingScaleFitted ? ' (fitted)' : ''}`;
  return `Sampling error of the means: ${SAMPLING_SOURCES[sampling.kind]}${scale}\n`;
}

function effectLines(summary: FitSummary): string {
  const rows: string[][] = [];
  const covariates = summary.covariateEffects;
  if (summary.elevationEffect !== null) {
    rows.push(['elevation, ‰ per 100 m', ...effectCells(summary.elevationEffect)]);
  }
  if (summary.latitudeEffect !== null) {
    const label = `latitude, ‰ per degree north at ${decimals(summary.centreLatitudeDeg, 1)}°`;
    rows.push([label, ...effectCells(summary.latitudeEffect)]);
  }
  for (const { name, effects } of covariates) {
    rows.push([`${name}, ‰ per unit`, ...effectCells(effects, significantEffectCell)]);
  }
  const any = summary.elevationEffect ?? summary.latitudeEffect ?? covariates[0]?.effects;
  const named = (['d18O', 'd2H', 'dexcess'] as const).filter((key) => any?.[key] != null);
  if (rows.length === 0) return 'Effects: the trend has neither elevation nor latitude in it\n';
  return textTable(['effect ± SE', ...named.map((key) => LABELS[key])], rows);
}

function effectCells(effects: IsotopeEffects, cell = effectCell): string[] {
  return [effects.d18O, effects.d2H, effects.dexcess].filter((effect) => effect !== null).map(cell);
}

/** A covariate's unit may be anything: three digits of the standard error, and the value as far as it goes. */
function significantEffectCell({ value, se }: Effect): string {
  const digits = Math.max(0, Math.min(20, 2 - Math.floor(Math.log10(se))));
  return se > 0 ? `${decimals(value, digits)} ± ${decimals(se, digits)}` : effectCell({ value, se });
}

function effectCell({ value, se }: Effect): string {
  return `${decimals(value, 3)} ± ${decimals(se, 3)}`;
}

function fieldLines(summary: FitSummary): string {
  const single = summary.axes === null;
  const rows = summary.fields.map((field) => [
    single ? LABELS[field.name] : field.name,
    `${decimals(field.rangeKm, 0)} km`,
    `${decimals(field.practicalRangeKm, 0)} km`,
    significant(field.sill, 3),
    significant(field.nugget, 3),
    [...field.fixed.map((name) => `${name} fixed`), ...field.boundsReached].join('; '),
  ]);
  const { family } = summary.isoscape;
  const unit = single ? ' (‰²)' : '';
  return textTable([`field (${family})`, 'range', '5 % distance', `sill${unit}`, `nugget${unit}`, ''], rows, {
    align: ['left', 'right', 'right', 'right', 'right', 'left'],
  });
}

function axesLines(summary: FitSummary): string {
  const { axes } = summary;
  if (axes === null) return '';
  const turnSe = Number.isNaN(axes.turnSeDeg) ? 'fixed' : `± ${decimals(axes.turnSeDeg, 1)}`;
  return (
    `Axes: along has slope ${decimals(axes.alongSlope, 2)} (δ2H per δ18O), across ${decimals(axes.acrossSlope, 2)}; ` +
    `turn ${decimals(axes.turnDeg, 1)}° ${turnSe}\n`
  );
}

function scoreLines(summary: FitSummary): string {
  const variables = [...new Set(summary.scores.map(({ variable }) => variable))];
  const blocks = variables.map((variable) => {
    const rows = summary.scores
      .filter((score) => score.variable === variable)
      .map((score) => [
        LABELS[score.method] ?? score.method,
        decimals(score.rmse, 3),
        decimals(score.meanSquaredZ, 2),
        Number.isNaN(score.coverage90) ? '–' : `${decimals(100 * score.coverage90, 1)} %`,
      ]);
    return textTable(
      [`leave-one-out, ${LABELS[variable]}`.padEnd(24), 'RMSE ‰', 'mean z²', '90 % covers'],
      rows,
    );
  });
  return blocks.join('\n');
}

function trendLines(summary: FitSummary): string {
  const { trendCandidates, terms, termsChosen } = summary.isoscape;
  const chosen = terms.length === 0 ? 'none' : terms.join(',');
  if (trendCandidates.length === 0) return `Trend: ${chosen} (${termsChosen})\n`;
  const best = Math.min(...trendCandidates.map(({ aicc }) => aicc));
  const rows = trendCandidates.map((candidate) => {
    const name = candidate.terms.length === 0 ? 'none' : candidate.terms.join(',');
    return [
      name,
      decimals(candidate.logLikelihood, 2),
      String(candidate.parameterCount),
      decimals(candidate.aicc - best, 2),
      name === chosen ? 'chosen' : '',
    ];
  });
  return textTable(['trend (maximum likelihood)', 'log-likelihood', 'parameters', 'ΔAICc', ''], rows, {
    align: ['left', 'right', 'right', 'right', 'left'],
  });
}

function familyLines(summary: FitSummary): string {
  const { familyCandidates, family } = summary.isoscape;
  if (familyCandidates.length < 2) return '';
  const rows = familyCandidates.map((candidate) => [
    candidate.family,
    decimals(candidate.logLikelihood, 2),
    candidate.family === family ? 'chosen' : '',
  ]);
  return textTable(['covariance family', 'restricted log-likelihood', ''], rows, {
    align: ['left', 'right', 'left'],
  });
}

function noteLines(summary: FitSummary): string {
  return summary.isoscape.notes.map((note) => `note: ${note}\n`).join('');
}
