import type { MeansValues } from './means-book.js';
import type { IsotopeChoice, StationMean } from './network.js';
import type { IsotopeTally, StationState } from './station-state.js';
import { effectiveRecords } from './within-sums.js';

/** A station with its mean made, before it is judged. */
export interface Candidate {
  readonly state: StationState;
  readonly mean: StationMean;
  /** Σp analysed / Σp all over the season and years; NaN where amounts are not known. */
  readonly coverage: number;
  /** For tables of means: what the row gave besides. */
  readonly given: MeansValues | null;
}

/** The means of a station's records. */
export function candidateFromRecords(state: StationState, choice: IsotopeChoice): Candidate {
  const total = state.sums.total();
  const none = total.count === 0;
  return {
    state,
    coverage: state.amountAllMm > 0 ? state.amountAnalysedMm / state.amountAllMm : Number.NaN,
    given: null,
    mean: {
      ...placeOf(state),
      d18O: none || choice === 'd2H' ? Number.NaN : total.meanD18O,
      d2H: none || choice === 'd18O' ? Number.NaN : total.meanD2H,
      effectiveRecords: effectiveRecords(total),
      recordCount: total.count,
    },
  };
}

/** The mean of the isotope a station has enough records of, where it lacks the other; null where it has not. */
export function oneIsotopeCandidate(state: StationState, minRecords: number): Candidate | null {
  const hasO = state.d18OAlone.count >= minRecords;
  const hasH = state.d2HAlone.count >= minRecords;
  if (hasO === hasH) return null;
  const tally: IsotopeTally = hasO ? state.d18OAlone : state.d2HAlone;
  return {
    state,
    coverage: Number.NaN,
    given: null,
    mean: {
      ...placeOf(state),
      d18O: hasO ? tally.mean : Number.NaN,
      d2H: hasH ? tally.mean : Number.NaN,
      effectiveRecords: tally.effectiveRecords,
      recordCount: tally.count,
    },
  };
}

/** The mean a table gives, with the isotopes asked for. */
export function candidateFromMeans(
  state: StationState,
  given: MeansValues,
  choice: IsotopeChoice,
): Candidate {
  return {
    state,
    coverage: Number.NaN,
    given,
    mean: {
      ...placeOf(state),
      line: given.line,
      d18O: choice === 'd2H' ? Number.NaN : given.d18O,
      d2H: choice === 'd18O' ? Number.NaN : given.d2H,
      effectiveRecords: given.n,
      recordCount: given.n,
    },
  };
}

function placeOf(state: StationState) {
  const { id, name, lonDeg, latDeg, elevationM, line } = state;
  return { id, name, lonDeg, latDeg, elevationM, line };
}
