import { QUANTITIES } from './tally.mjs';

/**
 * Networks pooled: each method beside kriging under the true parameters on the same networks. Standard errors count
 * networks, not sites, since the sites of one network share its luck.
 */

const METHODS = ['averaged', 'plugIn', 'auto'];

/** @param {ReturnType<import('./one-network.mjs').simulateNetwork>[]} results */
export function poolNetworks(results) {
  const methods = METHODS.filter((method) => results.some(({ tallies }) => tallies[method] !== undefined));
  return {
    networks: results.length,
    sites: results.reduce((sum, { tallies }) => sum + tallies.true.d18O.count, 0),
    quantities: Object.fromEntries(
      QUANTITIES.map((quantity) => [
        quantity,
        Object.fromEntries(methods.map((method) => [method, compare(results, method, quantity)])),
      ]),
    ),
    turn: turnErrors(results),
  };
}

function compare(results, method, quantity) {
  const pairs = results
    .filter(({ tallies }) => tallies[method] !== undefined)
    .map(({ tallies }) => ({ ours: tallies[method][quantity], truth: tallies.true[quantity] }));
  const sum = (which, key) => pairs.reduce((total, pair) => total + pair[which][key], 0);
  const sites = sum('ours', 'count');
  const difference = (key) => pairs.map(({ ours, truth }) => (ours[key] - truth[key]) / ours.count);
  return {
    networks: pairs.length,
    coverage: sum('ours', 'inside') / sites,
    coverageTrue: sum('truth', 'inside') / sites,
    coverageDifference: meanWithSe(difference('inside')),
    rmseRatio: Math.sqrt(sum('ours', 'squared') / sum('truth', 'squared')),
    rmse: Math.sqrt(sum('ours', 'squared') / sites),
    rmseTrue: Math.sqrt(sum('truth', 'squared') / sites),
    meanSquaredZ: sum('ours', 'squaredZ') / sites,
    meanSquaredZTrue: sum('truth', 'squaredZ') / sites,
    meanSquaredZDifference: meanWithSe(difference('squaredZ')),
  };
}

/** Mean error of the turn with its SE over networks, and of errors over their own standard errors. */
function turnErrors(results) {
  const errors = results.map(({ turnErrorDeg }) => turnErrorDeg);
  const squares = results.map(({ turnErrorDeg, turnSeDeg }) => (turnErrorDeg / turnSeDeg) ** 2);
  return {
    errorDeg: meanWithSe(errors),
    rmsDeg: Math.sqrt(meanWithSe(errors.map((error) => error ** 2)).mean),
    meanSquaredZ: meanWithSe(squares),
  };
}

export function meanWithSe(values) {
  const count = values.length;
  const mean = values.reduce((sum, value) => sum + value, 0) / count;
  const squares = values.reduce((sum, value) => sum + (value - mean) ** 2, 0);
  return { mean, se: Math.sqrt(squares / (count - 1) / count) };
}
