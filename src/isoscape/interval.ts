import { RainprintError } from '../errors.js';
import { gaussianQuantile } from '../geostat/gaussian.js';

/**
 * Half width of a central Gaussian interval in standard errors: 1.6449 at level 0.9.
 * @throws PARAMETER_OUT_OF_RANGE for a level outside (0, 1)
 */
export function intervalHalfWidth(level: number): number {
  if (!(level > 0 && level < 1)) {
    throw new RainprintError(
      'PARAMETER_OUT_OF_RANGE',
      `level ${level} is not between 0 and 1 (0.9 for 90 %)`,
      {
        level,
      },
    );
  }
  return gaussianQuantile(0.5 + level / 2);
}
