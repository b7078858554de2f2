import { RainprintError } from '../errors.js';
import { TERM_NAMES } from './trend.js';

/** A quantity a user adds to the trend: what it is called, where its values come from, how the trend scales it. */
export interface Covariate {
  readonly name: string;
  /** File name and first digits of the SHA-256 of the raster its values were sampled from. */
  readonly source: string;
  /** Mean and standard deviation over the stations of the fit: the trend's column is (value − centre) / scale. */
  readonly centre: number;
  readonly scale: number;
}

/** One covariate at the stations of a network, as a fit is given it. */
export interface CovariateValues extends Pick<Covariate, 'name' | 'source'> {
  /** One a station, in the order of the network's stations; all finite. */
  readonly values: Float64Array;
}

const NAME = /^[a-z][a-z0-9_]{0,31}$/;
/** Ends the name of the output column that tells where a covariate's value is from. */
const SOURCE_ENDING = '_source';

/**
 * The name of a covariate, which is also that of its trend term.
 * @throws COVARIATE_NAME_INVALID
 */
export function checkCovariateName(name: string): string {
  const taken = name === 'none' || name === 'auto' || (TERM_NAMES as readonly string[]).includes(name);
  if (NAME.test(name) && !name.endsWith(SOURCE_ENDING) && !taken) return name;
  const expected = `give a small letter, then up to 31 small letters, digits or _, not ending in ${SOURCE_ENDING}`;
  throw new RainprintError(
    'COVARIATE_NAME_INVALID',
    taken
      ? `a covariate cannot be called "${name}": that word has a meaning of its own among the trend terms`
      : `"${name}" is no name for a covariate: ${expected}`,
    { name },
  );
}
