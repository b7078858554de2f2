import { coverageAt } from '../geostat/scores.js';
import { methodResult, type ValidationResult, type VariableResult } from '../isoscape/validation.js';
import { beatenTexts } from './beaten.js';
import { fixed, levelText, percent, permil, sentence, textDecimals, VARIABLE_LABEL } from './wording.js';

/** The scores in words, made of the same numbers as the tables: the gist, then what stands beside it. */
export function summaryOf(validation: ValidationResult): { lead: string; points: string[] } {
  const { level, leaveOneOut, blocked } = validation;
  const held = leaveOneOut.variables
    .map((result) => `${percent(coverageOf(result, level), 1)} (${VARIABLE_LABEL[result.variable]})`)
    .join(', ');
  return {
    lead:
      `Predicted from all others, a station is missed by ${leaveOneOut.variables.map(rmseText).join(', ')} ` +
      `(root mean square). The ${levelText(level)} intervals hold ${held} of the observed means.`,
    points: [
      ...leaveOneOut.variables.map(againstBaselines),
      `With whole areas held out and the model refitted, the errors are ${blocked.variables.map(rmseText).join(', ')}.`,
      ...beatenTexts(blocked, VARIABLE_LABEL).map(sentence),
    ],
  };
}

function rmseText(result: VariableResult): string {
  const { rmse } = methodResult(result, 'isoscape').scores;
  return `${permil(rmse, textDecimals(result.variable))} in ${VARIABLE_LABEL[result.variable]}`;
}

function coverageOf(result: VariableResult, level: number): number {
  return coverageAt(methodResult(result, 'isoscape').scores, level);
}

/** How the isoscape stands to the best baseline: better, or not, said either way. */
function againstBaselines(result: VariableResult): string {
  const own = methodResult(result, 'isoscape').scores.rmse;
  const [mean, regression, nearest] = (['mean', 'regression', 'nearest'] as const).map(
    (method) => methodResult(result, method).scores.rmse,
  );
  const best = Math.min(...[mean, regression, nearest].filter((each) => !Number.isNaN(each)));
  const change = own / best - 1;
  const verdict =
    change < 0
      ? `an error ${percent(-change)} below that of the best baseline`
      : `an error ${percent(change)} above that of the best baseline: the isoscape adds nothing here`;
  const digits = textDecimals(result.variable);
  return (
    `${VARIABLE_LABEL[result.variable]}: ${verdict} (mean of the stations ${fixed(mean, digits)}, ` +
    `regression only ${fixed(regression, digits)}, nearest station ${permil(nearest, digits)}).`
  );
}
