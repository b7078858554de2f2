import { Matrix } from 'ml-matrix';
import { createPredictions, fitIsoscape, predictPlaces } from 'rainprint/isoscape';
import { createRandom } from '../demo/random.mjs';
import { closestFields } from './closest-fields.mjs';
import { drawCoregionalised } from './coregionalisation.mjs';
import { fitCoregionalisation } from './fit-coregionalisation.mjs';
import { cokrige, pairCovariance, stationCovariance } from './stacked.mjs';
import { jointLogScore } from './tally.mjs';
import { TERMS } from './truth.mjs';

const DEG = 180 / Math.PI;

/**
 * Joint log scores of one network's places: full cokriging under the truth; the along/across form with the parameters
 * closest to that truth (`form`); both with parameters estimated from the network (`estimate`).
 *
 * @param {{ seed: number, kind: string, stations: number, places: number, form: boolean, estimate: boolean }} task
 */
export function compareWithCokriging({ seed, kind, stations, places, form, estimate }) {
  const random = createRandom(seed, `cokriging, ${kind}, ${stations} stations`);
  const drawn = drawCoregionalised(random, kind, stations, places);
  const known = { family: drawn.family, terms: TERMS };
  const scores = { cokrigingTrue: jointLogScore(cokrigeUnder(drawn.model, drawn), drawn.truth) };
  if (form) {
    const { along, across, turnRad } = closestFields(drawn);
    const fix = { along, across, turnDeg: turnRad * DEG };
    scores.closest = score(fitIsoscape(drawn.network, { ...known, fix }), drawn, true);
  }
  if (estimate) {
    const fitted = fitIsoscape(drawn.network, known);
    scores.averaged = score(fitted, drawn, false);
    scores.plugIn = score(fitted, drawn, true);
    scores.cokrigingFitted = jointLogScore(cokrigeUnder(fitCoregionalisation(drawn), drawn), drawn.truth);
  }
  return { seed, kind, scores };
}

function score(isoscape, { places, truth }, plugIn) {
  const out = createPredictions(places.count);
  predictPlaces(isoscape, places, out, { plugIn });
  return jointLogScore(out, truth);
}

function cokrigeUnder(model, { distances, trend, records, observed }) {
  const n = records.length;
  const last = distances.rows - 1;
  const both = (matrix) => Matrix.eye(2).kroneckerProduct(matrix);
  return cokrige(
    {
      V: stationCovariance(model, distances.subMatrix(0, n - 1, 0, n - 1), records),
      F: both(trend.subMatrix(0, n - 1, 0, trend.columns - 1)),
      z: observed.flat(),
    },
    {
      C0: pairCovariance(model, distances.subMatrix(0, n - 1, n, last), false),
      F0: both(trend.subMatrix(n, last, 0, trend.columns - 1)),
      C00: pairCovariance(model, distances.subMatrix(n, last, n, last), true),
    },
  );
}
