import { RainprintError } from '../../errors.js';
import { COVARIANCE_FAMILIES, type CovarianceFamily, type FieldParameters } from '../../geostat/index.js';
import type { FitOptions, LikelihoodChoice } from '../../isoscape/index.js';
import { parseTerms } from '../../isoscape/trend.js';
import type { IsotopeChoice } from '../../stations/index.js';

type Fixed = NonNullable<FitOptions['fix']>;
type FixedField = Exclude<keyof Fixed, 'turnDeg'>;

const FIELDS: readonly FixedField[] = ['along', 'across', 'd18O', 'd2H'];
const PARAMETERS: Readonly<Record<string, keyof FieldParameters>> = {
  range_km: 'rangeKm',
  sill: 'sill',
  nugget: 'nugget',
};
const NUMBER = /^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i;
const FIX_FORM =
  'FIELD.PARAMETER=NUMBER (along.range_km=600, d18O.sill=2.2, across.nugget=0.1) or turn=DEGREES';

/** `auto` or a family's name. */
export function parseFamily(text: string): CovarianceFamily | 'auto' {
  const names: readonly string[] = ['auto', ...COVARIANCE_FAMILIES];
  if (names.includes(text)) return text as CovarianceFamily | 'auto';
  throw new RainprintError('OPTION_INVALID', `--family ${text}: use ${names.join(', ')}`, { value: text });
}

export function parseLikelihood(text: string): LikelihoodChoice {
  const found = (['auto', 'exact', 'vecchia'] as const).find((each) => each === text);
  if (found !== undefined) return found;
  throw new RainprintError('OPTION_INVALID', `--likelihood ${text}: use auto, exact or vecchia`, {
    value: text,
  });
}

/** `auto`, `none`, or trend terms joined by commas; covariates are terms too, and always among them. */
export function parseTermsOption(
  text: string,
  covariateNames: readonly string[] = [],
): readonly string[] | 'auto' {
  if (text.trim() === 'auto') return 'auto';
  const parts = text.split(',').map((part) => part.trim());
  if (parts.includes('') || (parts.length > 1 && (parts.includes('none') || parts.includes('auto')))) {
    throw new RainprintError(
      'OPTION_INVALID',
      `--terms ${text}: give auto, none, or terms joined by commas`,
      {
        value: text,
      },
    );
  }
  return parseTerms(text, covariateNames);
}

/** `fit`, or κ in (0, 1]. */
export function parseSamplingScale(text: string): number | 'fit' {
  if (text.trim() === 'fit') return 'fit';
  const value = NUMBER.test(text.trim()) ? Number(text) : Number.NaN;
  if (value > 0 && value <= 1) return value;
  throw new RainprintError(
    'OPTION_INVALID',
    `--sampling-scale ${text}: give fit, or a number above 0 and at most 1`,
    { value: text },
  );
}

/** All `--fix` of a call; FIX_INVALID for a wrong form, a wrong value, a parameter given twice, or a field the fit has not. */
export function parseFixes(texts: readonly string[], isotopes: IsotopeChoice): Fixed {
  const fixed: { turnDeg?: number } & Partial<Record<FixedField, Partial<FieldParameters>>> = {};
  for (const text of texts) {
    const { key, value } = splitFix(text);
    if (key === 'turn') {
      if (isotopes !== 'both') throw wrongFix(text, `a fit of ${isotopes} alone has no turn`);
      if (fixed.turnDeg !== undefined) throw wrongFix(text, 'turn is fixed twice');
      if (Math.abs(value) > 90) throw wrongFix(text, 'the turn lies between -90 and 90 degrees');
      fixed.turnDeg = value;
      continue;
    }
    const [field, parameter] = fieldParameter(text, key);
    assertFieldOfFit(text, field, isotopes);
    assertValue(text, parameter, value);
    const ofField = fixed[field] ?? {};
    if (ofField[parameter] !== undefined) throw wrongFix(text, `${key} is fixed twice`);
    fixed[field] = { ...ofField, [parameter]: value };
  }
  return fixed;
}

function splitFix(text: string): { key: string; value: number } {
  const [key, number, ...rest] = text.split('=').map((part) => part.trim());
  if (number === undefined || rest.length > 0 || !NUMBER.test(number)) {
    throw wrongFix(text, `expected ${FIX_FORM}`);
  }
  const value = Number(number);
  if (!Number.isFinite(value)) throw wrongFix(text, 'the number is too large');
  return { key, value };
}

function fieldParameter(text: string, key: string): [FixedField, keyof FieldParameters] {
  const [field, name, ...rest] = key.split('.');
  const parameter = Object.hasOwn(PARAMETERS, name ?? '') ? PARAMETERS[name] : undefined;
  if (!(FIELDS as readonly string[]).includes(field) || parameter === undefined || rest.length > 0) {
    throw wrongFix(text, `expected ${FIX_FORM}`);
  }
  return [field as FixedField, parameter];
}

function assertFieldOfFit(text: string, field: FixedField, isotopes: IsotopeChoice): void {
  if (isotopes === 'both' && field !== 'along' && field !== 'across') {
    throw wrongFix(
      text,
      `a fit of both isotopes has the fields along and across (or add --isotope ${field})`,
    );
  }
  if (isotopes !== 'both' && field !== isotopes) {
    throw wrongFix(text, `a fit of ${isotopes} alone has the field ${isotopes} only`);
  }
}

function assertValue(text: string, parameter: keyof FieldParameters, value: number): void {
  if (parameter === 'rangeKm' ? value > 0 : value >= 0) return;
  throw wrongFix(text, parameter === 'rangeKm' ? 'a range is above 0 km' : 'a sill or nugget is not below 0');
}

function wrongFix(text: string, reason: string): RainprintError {
  return new RainprintError('FIX_INVALID', `--fix ${text}: ${reason}`, { value: text });
}
