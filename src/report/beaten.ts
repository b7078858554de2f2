import {
  methodResult,
  type SchemeResult,
  type ValidationMethod,
  type VariableResult,
} from '../isoscape/validation.js';
import { fixed, textDecimals } from './wording.js';

const BASELINE_WORDS = {
  mean: 'the mean of the stations',
  regression: 'the regression on the trend terms',
  nearest: 'the nearest station',
} as const satisfies Partial<Record<ValidationMethod, string>>;
type Baseline = keyof typeof BASELINE_WORDS;
const BASELINES = Object.keys(BASELINE_WORDS) as Baseline[];

/** The baseline with the least RMSE, where it is below the isoscape's; null where the isoscape is not beaten. */
export function beatenBy(result: VariableResult): { method: Baseline; rmse: number } | null {
  const own = methodResult(result, 'isoscape').scores.rmse;
  const beaters = BASELINES.map((method) => ({ method, rmse: methodResult(result, method).scores.rmse }))
    .filter(({ rmse }) => rmse < own)
    .sort((a, b) => a.rmse - b.rmse);
  return beaters[0] ?? null;
}

/**
 * A sentence for each variable where a baseline does better than the isoscape.
 * @param labels how the variables are written
 */
export function beatenTexts(
  { scheme, variables }: SchemeResult,
  labels: Readonly<Record<VariableResult['variable'], string>>,
): string[] {
  return variables.flatMap((result) => {
    const best = beatenBy(result);
    if (best === null) return [];
    const own = methodResult(result, 'isoscape').scores.rmse;
    const [theirs, ours] = toldApart(best.rmse, own, textDecimals(result.variable));
    const what = `${labels[result.variable]} ${BASELINE_WORDS[best.method]} alone does better`;
    return [`${scheme}: for ${what} (RMSE ${theirs} against ${ours} ‰)`];
  });
}

/** Two figures with as many decimals as it takes to see that they differ, up to six. */
function toldApart(a: number, b: number, decimals: number): [string, string] {
  const [first, second] = [fixed(a, decimals), fixed(b, decimals)];
  return first === second && decimals < 6 ? toldApart(a, b, decimals + 1) : [first, second];
}
