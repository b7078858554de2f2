import { createPredictions, fitIsoscape, predictPlaces } from 'rainprint/isoscape';
import { createRandom } from '../demo/random.mjs';
import { drawNetwork, withTrueWithin } from './network.mjs';
import { tallySites } from './tally.mjs';
import { drawTruth, TERMS } from './truth.mjs';

const DEG = 180 / Math.PI;

/**
 * Draws one network, fits it knowing family and trend (and, if asked, neither), and kriges the same stations
 * under the true parameters, so that the luck of a network cancels in the comparison.
 *
 * @param {{ seed: number, stations: number, sites: number, auto: boolean }} task
 */
export function simulateNetwork({ seed, stations, sites, auto }) {
  const random = createRandom(seed, `simulation of ${stations} stations`);
  const truth = drawTruth(random, stations);
  const drawn = drawNetwork(random, truth, stations, sites, `invented network, seed ${seed}`);
  const known = { family: truth.family, terms: TERMS };
  const fitted = fitIsoscape(drawn.network, known);
  const fixed = { along: truth.along, across: truth.across, turnDeg: truth.turnRad * DEG };
  const reference = fitIsoscape(withTrueWithin(drawn.network, truth.within), { ...known, fix: fixed });
  const tallies = {
    true: score(reference, drawn, true),
    averaged: score(fitted, drawn, false),
    plugIn: score(fitted, drawn, true),
  };
  const chosen = auto ? fitIsoscape(drawn.network) : null;
  if (chosen !== null) tallies.auto = score(chosen, drawn, false);
  return {
    seed,
    tallies,
    turnErrorDeg: quarterTurn((fitted.turnRad - truth.turnRad) * DEG),
    turnSeDeg: Math.sqrt(fitted.turnVarianceRad2) * DEG,
    truth,
    fit: { turnRad: fitted.turnRad, along: fitted.along.parameters, across: fitted.across.parameters },
    nodes: fitted.along.nodes.length + fitted.across.nodes.length,
    auto: chosen === null ? null : { family: chosen.family, terms: chosen.terms },
  };
}

function score(isoscape, { sites, siteTruth }, plugIn) {
  const out = createPredictions(sites.count);
  predictPlaces(isoscape, sites, out, { plugIn });
  return tallySites(out, siteTruth);
}

/** Axes 90° apart are the same pair with the fields exchanged: an error in (−45°, 45°]. */
export function quarterTurn(degrees) {
  const rest = degrees - 90 * Math.round(degrees / 90);
  return rest <= -45 ? rest + 90 : rest;
}
