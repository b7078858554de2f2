/**
 * The one list of error codes. `input` means the data or the call is wrong (exit code 2, HTTP 4xx); `fault`
 * means the tool or the machine failed (exit code 1, HTTP 5xx). One line a code, grouped by the folder that
 * throws it; tests prove that every code thrown is listed here and documented nowhere else.
 */
export const ERROR_CODES = {
  // the call
  OPTION_INVALID: 'input',
  FILE_NOT_FOUND: 'input',
  FILE_NOT_READABLE: 'input',
  FILE_NOT_WRITABLE: 'fault',
  INTERNAL: 'fault',
  // geostat, kernels
  MATRIX_NOT_POSITIVE_DEFINITE: 'input',
  TREND_COLLINEAR: 'input',
  STATIONS_TOO_FEW: 'input',
  STATIONS_COINCIDENT: 'input',
  WITHIN_COVARIANCE_SINGULAR: 'input',
  PARAMETER_OUT_OF_RANGE: 'input',
  LIKELIHOOD_NOT_CONVERGED: 'fault',
  // isoscape
  TERM_UNKNOWN: 'input',
  ISOTOPE_MISSING: 'input',
  ISOSCAPE_NOT_JSON: 'input',
  ISOSCAPE_DAMAGED: 'input',
  ISOSCAPE_OLDER: 'input',
  ISOSCAPE_NEWER: 'input',
} as const satisfies Record<string, 'input' | 'fault'>;

export type ErrorCode = keyof typeof ERROR_CODES;

/** What a caller may act on: where the trouble is and what was expected there. */
export interface ErrorDetails {
  readonly [key: string]: string | number | boolean | null | readonly (string | number)[];
}

/** Every error Rainprint throws on purpose. The message names the received value and the allowed one. */
export class RainprintError extends Error {
  override readonly name = 'RainprintError';
  constructor(
    readonly code: ErrorCode,
    message: string,
    readonly details: ErrorDetails = {},
  ) {
    super(message);
  }

  get kind(): 'input' | 'fault' {
    return ERROR_CODES[this.code];
  }
}
