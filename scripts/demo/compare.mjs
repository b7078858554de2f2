import { Matrix, solve } from 'ml-matrix';

/** Predictions at places whose truth is known, scored plainly; and the three predictors any model has to beat. */

export const QUANTITIES = ['d18O', 'd2H', 'dexcess'];

/** Adds the d-excess to a pair, so that all three quantities are read alike. */
export function withDExcess({ d18O, d2H }) {
  return { d18O, d2H, dexcess: d2H - 8 * d18O };
}

/**
 * One entry a quantity: sites, those whose truth lies within the interval, the sums of error, squared error and
 * squared error over SE. Sums add up over networks.
 *
 * @param truths one { d18O, d2H } a site
 * @param predictions one { d18O, d18O_se, d18O_low, d18O_high, d2H, … } a site, as in the columns `sites` writes
 */
export function scoreSites(truths, predictions) {
  const tallies = QUANTITIES.map((quantity) => {
    const tally = { count: 0, inside: 0, error: 0, squared: 0, squaredZ: 0, width: 0 };
    truths.forEach((pair, k) => {
      const truth = withDExcess(pair)[quantity];
      const [mean, se, low, high] = ['', '_se', '_low', '_high'].map(
        (part) => predictions[k][`${quantity}${part}`],
      );
      if (![mean, se, low, high].every(Number.isFinite)) {
        throw new Error(`site ${k + 1} has no complete ${quantity} to compare with the truth`);
      }
      tally.count += 1;
      if (low <= truth && truth <= high) tally.inside += 1;
      tally.error += mean - truth;
      tally.squared += (mean - truth) ** 2;
      tally.squaredZ += ((mean - truth) / se) ** 2;
      tally.width += high - low;
    });
    return [quantity, tally];
  });
  return Object.fromEntries(tallies);
}

/** What people read off a tally. */
export function summarise(tally) {
  const { count } = tally;
  return {
    count,
    coverage: tally.inside / count,
    rmse: Math.sqrt(tally.squared / count),
    bias: tally.error / count,
    meanSquaredZ: tally.squaredZ / count,
    meanWidth: tally.width / count,
  };
}

/**
 * Sums of squared errors at the sites, one a quantity, of: the mean of all station means; ordinary least squares on
 * latitude and elevation; the nearest station.
 *
 * @param stations { lonDeg, latDeg, elevationM, d18O, d2H } typed arrays, one element a station
 * @param sites    places with lonDeg, latDeg, elevationM
 * @param distanceKm (lon1, lat1, lon2, lat2) => km
 */
export function baselineSquares(stations, sites, truths, distanceKm) {
  const values = Array.from(stations.d18O, (d18O, k) => withDExcess({ d18O, d2H: stations.d2H[k] }));
  const row = (latDeg, elevationM) => [1, latDeg, elevationM / 1000];
  const design = new Matrix(values.map((_, k) => row(stations.latDeg[k], stations.elevationM[k])));
  const nearest = sites.map((site) => nearestIndex(stations, site, distanceKm));
  const predictors = (quantity) => {
    const observed = values.map((value) => value[quantity]);
    const average = observed.reduce((sum, v) => sum + v, 0) / observed.length;
    const beta = solve(design, Matrix.columnVector(observed), true).to1DArray();
    const regression = (site) =>
      row(site.latDeg, site.elevationM).reduce((sum, f, k) => sum + f * beta[k], 0);
    return { mean: () => average, regression, nearest: (_, k) => observed[nearest[k]] };
  };
  const squares = (predict, quantity) =>
    truths.reduce((sum, pair, k) => sum + (predict(sites[k], k) - withDExcess(pair)[quantity]) ** 2, 0);
  return Object.fromEntries(
    QUANTITIES.map((quantity) => {
      const entries = Object.entries(predictors(quantity));
      return [
        quantity,
        Object.fromEntries(entries.map(([name, predict]) => [name, squares(predict, quantity)])),
      ];
    }),
  );
}

function nearestIndex(stations, site, distanceKm) {
  let best = 0;
  let bestKm = Number.POSITIVE_INFINITY;
  for (let k = 0; k < stations.lonDeg.length; k++) {
    const away = distanceKm(site.lonDeg, site.latDeg, stations.lonDeg[k], stations.latDeg[k]);
    if (away < bestKm) [best, bestKm] = [k, away];
  }
  return best;
}
