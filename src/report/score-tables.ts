import { COVERAGE_LEVELS, coverageAt } from '../geostat/scores.js';
import {
  type MethodResult,
  methodResult,
  type SchemeResult,
  type ValidationResult,
  type VariableResult,
} from '../isoscape/validation.js';
import { type Cell, element, type PageDocument, type PageElement, table } from './document.js';
import { fixed, levelsShown, levelText, METHOD_LABEL, percent, VARIABLE_LABEL } from './wording.js';

export const SCHEME_LABEL: Readonly<Record<SchemeResult['scheme'], string>> = {
  'leave-one-out': 'Leave-one-out: each station predicted from all others',
  blocked: 'Blocked: whole areas held out, the model refitted to the rest',
};

/** Scores of the isoscape and the baselines, one table a scheme. */
export function scoreTables(document: PageDocument, validation: ValidationResult): PageElement[] {
  return [validation.leaveOneOut, validation.blocked].map((scheme) => {
    const cover = (level: number) => `within ${levelText(level)}`;
    return table(document, {
      caption: `${SCHEME_LABEL[scheme.scheme]} (nearest station left in: ${fixed(scheme.medianNearestKm, 0)} km away, median)`,
      columns: [
        'variable',
        'predictor',
        'stations',
        'RMSE, ‰',
        'MAE, ‰',
        'bias, ‰',
        'CRPS, ‰',
        ...levelsShown(validation.level).map(cover),
        'mean z²',
      ],
      rows: scheme.variables.flatMap((result) =>
        result.methods.map((method) => scoreRow(result, method, validation.level)),
      ),
      compact: true,
      rowClass: (index) => (index % 4 === 0 ? 'own group' : ''),
    });
  });
}

function scoreRow(result: VariableResult, { method, scores }: MethodResult, level: number): Cell[] {
  const digits = result.variable === 'd2H' ? 2 : 3;
  const number = (value: number): Cell => ({ number: fixed(value, digits) });
  return [
    VARIABLE_LABEL[result.variable],
    METHOD_LABEL[method],
    { number: String(scores.count) },
    number(scores.rmse),
    number(scores.mae),
    number(scores.bias),
    number(scores.crps),
    ...levelsShown(level).map((each): Cell => ({ number: percent(coverageAt(scores, each), 1) })),
    { number: fixed(scores.meanSquaredZ, 2) },
  ];
}

/** Coverage of the isoscape's own intervals at all levels scored. */
export function coverageTable(document: PageDocument, validation: ValidationResult): PageElement {
  const levels = [...new Set([...COVERAGE_LEVELS, validation.level])].sort((a, b) => a - b);
  return table(document, {
    caption: 'Share of observed means within the isoscape’s intervals',
    columns: ['variable', 'scheme', ...levels.map(levelText)],
    rows: [validation.leaveOneOut, validation.blocked].flatMap((scheme) =>
      scheme.variables.map((result): Cell[] => [
        VARIABLE_LABEL[result.variable],
        scheme.scheme,
        ...levels.map(
          (level): Cell => ({
            number: percent(coverageAt(methodResult(result, 'isoscape').scores, level), 1),
          }),
        ),
      ]),
    ),
  });
}

/** Stations beyond three standard deviations, or the sentence that there is none. */
export function outlyingPart(document: PageDocument, validation: ValidationResult): PageElement {
  const expected = fixed(validation.outlyingExpected, 1);
  if (validation.outlying.length === 0) {
    return element(
      document,
      'p',
      {},
      `No station’s leave-one-out error is beyond three standard deviations (Gaussian errors would give about ${expected}).`,
    );
  }
  const number = (value: number, digits: number): Cell => ({ number: fixed(value, digits) });
  return table(document, {
    caption: `Leave-one-out errors beyond three standard deviations (Gaussian errors would give about ${expected})`,
    columns: ['station', 'id', 'variable', 'observed, ‰', 'predicted, ‰', 'SD, ‰', 'z'],
    rows: validation.outlying.map((each): Cell[] => [
      each.name,
      each.id,
      VARIABLE_LABEL[each.variable],
      number(each.observed, 2),
      number(each.predicted, 2),
      number(each.sd, 2),
      number(each.z, 2),
    ]),
  });
}

/** Blocked folds with their sizes and, where a refit failed, the reason. */
export function foldTable(document: PageDocument, validation: ValidationResult): PageElement {
  return table(document, {
    caption: 'Blocked folds',
    columns: ['fold', 'stations held out', 'stations fitted', 'refit'],
    rows: validation.folds.map(({ fold, heldOutCount, trainingCount, failure }): Cell[] => [
      String(fold + 1),
      { number: String(heldOutCount) },
      { number: String(trainingCount) },
      failure === null ? 'done' : `not possible: ${failure.code}: ${failure.message}`,
    ]),
  });
}
