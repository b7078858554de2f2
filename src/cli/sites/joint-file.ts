import { RainprintError } from '../../errors.js';
import { type Isoscape, type Places, predictJoint } from '../../isoscape/index.js';
import type { OutputFile } from '../output-file.js';
import { covariatesOf } from './explanations.js';
import type { Site } from './site-reader.js';
import type { SitesOptions } from './sites-options.js';

/** The matrix has (2 × sites)² numbers: 1,000 sites make a file of some 60 MB. */
export const MAX_JOINT_SITES = 1000;

export function assertJointSize(siteCount: number): void {
  if (siteCount <= MAX_JOINT_SITES) return;
  throw new RainprintError(
    'JOINT_TOO_MANY_SITES',
    `--joint takes at most ${MAX_JOINT_SITES} sites; the table has more`,
    { limit: MAX_JOINT_SITES },
  );
}

/**
 * Writes the joint prediction as JSON: `variables` names the rows and columns (site by site, δ18O before δ2H), `mean`
 * in ‰, `covariance` in ‰² as an array of rows. Sites with a problem are left out.
 */
export async function writeJoint(
  file: OutputFile,
  isoscape: Isoscape,
  sites: readonly Site[],
  places: Places,
  options: SitesOptions,
): Promise<void> {
  const { target, plugIn } = options;
  const { mean, covariance } = predictJoint(isoscape, places, { target, plugIn });
  const isotopes = isoscape.isotopes === 'both' ? ['d18O', 'd2H'] : [isoscape.isotopes];
  const size = mean.length;
  const head = {
    isoscape: isoscape.id,
    target,
    plug_in: plugIn,
    sites: sites.map((site, i) => ({
      site: site.label,
      lon: site.lonDeg,
      lat: site.latDeg,
      elevation_m: nullable(places.elevationM[i]),
      ...covariatesOf(isoscape, places, i),
    })),
    variables: sites.flatMap((site) => isotopes.map((isotope) => ({ site: site.label, isotope }))),
    mean: [...mean].map(shortened),
  };
  await file.write(`${JSON.stringify(head).slice(0, -1)},"covariance":[`);
  for (let row = 0; row < size; row++) {
    const values = [...covariance.subarray(row * size, (row + 1) * size)].map(shortened);
    await file.write(`${row === 0 ? '' : ','}\n${JSON.stringify(values)}`);
  }
  await file.write('\n]}\n');
}

/** Ten significant digits: the matrix stays positive definite where it was well away from singular. */
function shortened(value: number): number {
  return Number(value.toPrecision(10));
}

function nullable(value: number): number | null {
  return Number.isNaN(value) ? null : value;
}
