import { beforeAll, describe, expect, it } from 'vitest';
import { validationText } from '../../src/cli/validate/validation-text.js';
import type { Isoscape } from '../../src/isoscape/index.js';
import { validateIsoscape } from '../../src/isoscape/validate.js';
import type { SchemeResult, ValidationMethod, ValidationResult } from '../../src/isoscape/validation.js';
import { beatenTexts } from '../../src/report/beaten.js';
import { summaryOf } from '../../src/report/summary.js';
import { VARIABLE_LABEL } from '../../src/report/wording.js';
import { fitCsv, HELD } from '../support/fit-csv.js';
import { inventNetwork } from '../support/invented-network.js';

/** The scheme with the RMSE of d-excess set by hand: isoscape, mean, regression, nearest. */
function withRmse(scheme: SchemeResult, rmse: Readonly<Record<ValidationMethod, number>>): SchemeResult {
  const variables = scheme.variables.map((result) => ({
    ...result,
    methods: result.methods.map((each) => ({
      ...each,
      scores: { ...each.scores, rmse: result.variable === 'dexcess' ? rmse[each.method] : each.scores.rmse },
    })),
  }));
  return { ...scheme, variables: variables.filter(({ variable }) => variable === 'dexcess') };
}

describe('where a baseline beats the isoscape', () => {
  let isoscape: Isoscape;
  let validation: ValidationResult;
  beforeAll(async () => {
    isoscape = await fitCsv(inventNetwork({ seed: 17, stationCount: 24 }).csv, HELD, {});
    validation = validateIsoscape(isoscape, { folds: 4 });
  });

  const said = 'blocked: for d-excess the nearest station alone does better (RMSE 2.02 against 2.06 ‰)';
  const worse = { isoscape: 2.06, mean: 2.4, regression: 2.04, nearest: 2.02 };
  const better = { isoscape: 2.01, mean: 2.4, regression: 2.04, nearest: 2.02 };

  it('names the best of them, and no one where none does', () => {
    expect(beatenTexts(withRmse(validation.blocked, worse), VARIABLE_LABEL)).toEqual([said]);
    expect(beatenTexts(withRmse(validation.blocked, better), VARIABLE_LABEL)).toEqual([]);
    const alike = { ...worse, nearest: Number.NaN, regression: 2.0596 };
    expect(beatenTexts(withRmse(validation.blocked, alike), VARIABLE_LABEL)).toEqual([
      'blocked: for d-excess the regression on the trend terms alone does better (RMSE 2.0596 against 2.0600 ‰)',
    ]);
    expect(
      beatenTexts(withRmse(validation.blocked, { ...worse, isoscape: Number.NaN }), VARIABLE_LABEL),
    ).toEqual([]);
  });

  it('stands in the text and in the summary of the page', () => {
    const beaten = { ...validation, blocked: withRmse(validation.blocked, worse) };
    const unbeaten = { ...validation, blocked: withRmse(validation.blocked, better) };
    expect(validationText(isoscape, beaten)).toContain(`\n${said}\n`);
    expect(validationText(isoscape, unbeaten)).not.toContain('blocked: for d-excess');
    expect(summaryOf(beaten).points).toContain(`${said.replace('blocked', 'Blocked')}.`);
    expect(summaryOf(unbeaten).points.join()).not.toContain('does better');
  });
});
