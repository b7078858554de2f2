import { RainprintError } from '../errors.js';
import { checkCovariateName } from '../isoscape/covariate.js';
import type { CovariateFile } from '../jobs/covariate-files.js';

/**
 * Every `--covariate NAME=FILE.tif` of a call, in the order of their names.
 * @throws OPTION_INVALID, COVARIATE_NAME_INVALID, COVARIATE_TWICE
 */
export function parseCovariates(texts: readonly string[]): CovariateFile[] {
  const files = texts.map(parseCovariate).sort((a, b) => (a.name < b.name ? -1 : 1));
  const twice = files.find(({ name }, k) => files[k - 1]?.name === name);
  if (twice === undefined) return files;
  throw new RainprintError('COVARIATE_TWICE', `--covariate ${twice.name} is given twice`, {
    covariate: twice.name,
  });
}

function parseCovariate(text: string): CovariateFile {
  const at = text.indexOf('=');
  const path = text.slice(at + 1).trim();
  if (at < 0 || path === '') {
    throw new RainprintError(
      'OPTION_INVALID',
      `--covariate ${text}: expected NAME=FILE.tif, such as humidity=humidity.tif`,
      { value: text },
    );
  }
  return { name: checkCovariateName(text.slice(0, at).trim()), path };
}
