import { coverageAt } from '../../geostat/scores.js';
import type { Isoscape } from '../../isoscape/index.js';
import type { SchemeResult, ValidationResult } from '../../isoscape/validation.js';
import { beatenTexts } from '../../report/beaten.js';
import { levelsShown, levelText } from '../../report/wording.js';
import { decimals, textTable } from '../text-table.js';

const VARIABLE_LABEL = { d18O: 'δ18O', d2H: 'δ2H', dexcess: 'd-excess' } as const;
const METHOD_LABEL = {
  isoscape: 'isoscape',
  mean: 'mean of stations',
  regression: 'regression only',
  nearest: 'nearest station',
} as const;

/** The tables `validate` prints for a person to read. */
export function validationText(isoscape: Isoscape, result: ValidationResult): string {
  const averaged = result.plugIn ? ', estimated parameters taken for known' : '';
  return [
    `Isoscape ${result.isoscapeId.slice(0, 12)} of network ${isoscape.networkName}: ` +
      `${result.stationCount} stations${averaged}\n`,
    schemeText('Leave-one-out', result.leaveOneOut, result.level),
    schemeText(`Blocked, ${result.folds.length} folds refitted`, result.blocked, result.level),
    [result.leaveOneOut, result.blocked]
      .flatMap((scheme) => beatenTexts(scheme, VARIABLE_LABEL))
      .map((text) => `${text}\n`)
      .join(''),
    outlyingText(result),
    result.notes.map((note) => `note: ${note}\n`).join(''),
  ]
    .filter((part) => part !== '')
    .join('\n');
}

function schemeText(title: string, scheme: SchemeResult, level: number): string {
  const levels = levelsShown(level);
  const rows = scheme.variables.flatMap(({ variable, methods }) =>
    methods.map(({ method, scores }, at) => [
      at === 0 ? VARIABLE_LABEL[variable] : '',
      METHOD_LABEL[method],
      String(scores.count),
      decimals(scores.rmse, 3),
      decimals(scores.mae, 3),
      decimals(scores.bias, 3),
      decimals(scores.crps, 3),
      ...levels.map((each) => percent(coverageAt(scores, each))),
      decimals(scores.meanSquaredZ, 2),
    ]),
  );
  const covers = levels.map((each) => `${levelText(each).replace('\u00a0', ' ')} covers`); // plain space: grep finds it
  const header = ['variable', 'predictor', 'n', 'RMSE ‰', 'MAE ‰', 'bias ‰', 'CRPS ‰', ...covers, 'mean z²'];
  return (
    `${title} (nearest station left in: ${decimals(scheme.medianNearestKm, 0)} km away, median)\n` +
    textTable(header, rows, { align: ['left', 'left'] })
  );
}

function outlyingText(result: ValidationResult): string {
  const expected = decimals(result.outlyingExpected, 1);
  if (result.outlying.length === 0) {
    return `Leave-one-out errors beyond 3 SD: none (Gaussian errors would give about ${expected})\n`;
  }
  const rows = result.outlying.map((each) => [
    each.id,
    each.name === each.id ? '' : each.name,
    VARIABLE_LABEL[each.variable],
    decimals(each.observed, 2),
    decimals(each.predicted, 2),
    decimals(each.sd, 2),
    decimals(each.z, 2),
  ]);
  return (
    `Leave-one-out errors beyond 3 SD: ${result.outlying.length} (Gaussian errors would give about ${expected})\n` +
    textTable(['station', 'name', 'variable', 'observed ‰', 'predicted ‰', 'SD ‰', 'z'], rows, {
      align: ['left', 'left', 'left'],
    })
  );
}

function percent(share: number): string {
  return Number.isNaN(share) ? decimals(share, 1) : `${decimals(100 * share, 1)} %`;
}
