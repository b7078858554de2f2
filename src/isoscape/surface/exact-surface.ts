import type { Isoscape } from '../isoscape.js';
import type { StationsUsed } from '../large-network.js';
import { createPredictions, type Predictions, pickPlaces } from '../places.js';
import { predictPlaces } from '../predict.js';
import type { Surface, SurfaceOptions } from './surface.js';

/** Cells handed to the predictor at once: enough to pay for loading a factor, few enough to keep memory flat. */
const CELLS_AT_ONCE = 8192;

/**
 * Every wanted cell by itself: what the interpolating surface is measured against.
 * @param stations  which enter a prediction: `all` for `--exact`
 */
export function createExactSurface(
  isoscape: Isoscape,
  options: Pick<SurfaceOptions, 'plugIn' | 'target'>,
  stations: StationsUsed,
): Surface {
  const { plugIn, target } = options;
  return {
    predictWindow(_window, places, wanted, out) {
      const cells: number[] = [];
      const flush = () => {
        const part = pickPlaces(places, cells);
        const answers = createPredictions(cells.length);
        predictPlaces(isoscape, part, answers, { plugIn, target, stations });
        scatter(answers, cells, out);
        cells.length = 0;
      };
      for (let k = 0; k < wanted.length; k++) {
        if (wanted[k] === 1) cells.push(k);
        if (cells.length === CELLS_AT_ONCE) flush();
      }
      if (cells.length > 0) flush();
    },
  };
}

function scatter(answers: Predictions, cells: readonly number[], out: Predictions): void {
  for (const name of ['d18O', 'd2H', 'varD18O', 'varD2H', 'cov'] as const) {
    for (let j = 0; j < cells.length; j++) out[name][cells[j]] = answers[name][j];
  }
}
