import type { FittedField, Isoscape } from './isoscape.js';
import { scaleBoundReached } from './sampling-scale.js';
import { crowdedOutTerms } from './trend-choice.js';

/** Sentences a person should read beside a fit: what was assumed, chosen, or could not be told. */
export function describeFit(isoscape: Isoscape, stationsOfUnknownRecords: number): string[] {
  const fields = isoscape.isotopes === 'both' ? [isoscape.along, isoscape.across] : [isoscape.field];
  return [
    ...likelihoodNotes(isoscape),
    ...samplingNotes(isoscape, stationsOfUnknownRecords),
    ...(isoscape.termsChosen === 'auto'
      ? [
          'the trend terms were chosen from the same data (AICc under maximum likelihood); the intervals do not ' +
            'contain the uncertainty of this choice',
        ]
      : []),
    ...crowdedOutTerms(isoscape).map(
      (term) =>
        `the term ${term} was not offered to the choice: over the stations it cannot be told from the covariates`,
    ),
    ...(isoscape.familyChosen === 'auto'
      ? ['the covariance family was chosen by restricted likelihood; the intervals ignore this choice too']
      : []),
    ...fields.flatMap(fieldNotes),
  ];
}

function likelihoodNotes({ likelihood, stations, family }: Isoscape): string[] {
  if (likelihood.method === 'exact') return [];
  return [
    `the likelihood is Vecchia's approximation: each of the ${stations.id.length} stations is conditioned on the ` +
      `${likelihood.neighbours} nearest of those before it in an order that spreads over the network`,
    ...(family === 'spherical'
      ? [
          'this approximation tells the range of a spherical covariance to about one of its standard errors only',
        ]
      : []),
  ];
}

function samplingNotes(isoscape: Isoscape, unknown: number): string[] {
  const notes: string[] = [];
  switch (isoscape.sampling.kind) {
    case 'none':
      notes.push(
        'the table gives no within-station spread: sampling error is not separated but sits in the nugget, and the ' +
          'axes are whitened by the covariance of the regression residuals',
      );
      break;
    case 'standard-deviations':
      if (isoscape.isotopes === 'both') {
        notes.push(
          `the within-station correlation of the two isotopes is assumed to be ${isoscape.sampling.assumedCorrelation} ` +
            '(common practice): the table gives standard deviations only',
        );
      }
      break;
    case 'records':
      if (!isoscape.sampling.amountWeighted) {
        notes.push('precipitation amounts are missing: station means are unweighted');
      }
      break;
  }
  if (unknown > 0 && isoscape.sampling.kind !== 'none') {
    notes.push(
      `${unknown} stations do not give a number of records: the smallest known number was used for them`,
    );
  }
  if (isoscape.samplingScaleFitted) {
    const bound = scaleBoundReached(isoscape.samplingScale);
    if (bound !== null) notes.push(`the sampling scale was fitted and reached its ${bound} bound`);
  }
  return notes;
}

function fieldNotes(field: FittedField): string[] {
  const notes = field.boundsReached.map((bound) => `${field.name} field: ${bound}`);
  if (field.longRangeLimit) {
    const ratio = field.parameters.sill / field.parameters.rangeKm;
    notes.push(
      `${field.name} field: the range (${field.parameters.rangeKm.toFixed(0)} km) is longer than the network is wide; ` +
        `sill and range run away together, only their ratio (${ratio.toExponential(2)} per km) is determined: within ` +
        'the network this is a linear variogram',
    );
  }
  return notes;
}
