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
  FILE_TOO_LARGE: 'input',
  FILE_NOT_WRITABLE: 'fault',
  OUTPUT_IS_INPUT: 'input',
  OUTPUT_PATH_INVALID: 'input',
  FIX_INVALID: 'input',
  SITES_WITH_PROBLEMS: 'input',
  AREAS_WITH_PROBLEMS: 'input',
  JOINT_TOO_MANY_SITES: 'input',
  INTERNAL: 'fault',
  // geostat, kernels
  MATRIX_NOT_POSITIVE_DEFINITE: 'input',
  TREND_COLLINEAR: 'input',
  STATIONS_TOO_FEW: 'input',
  STATIONS_COINCIDENT: 'input',
  WITHIN_COVARIANCE_SINGULAR: 'input',
  PARAMETER_OUT_OF_RANGE: 'input',
  LIKELIHOOD_NOT_CONVERGED: 'fault',
  NETWORK_TOO_LARGE: 'input',
  MATRIX_TOO_LARGE: 'input',
  KERNEL_MEMORY_MISSING: 'fault',
  KERNELS_UNAVAILABLE: 'fault',
  // stations: any table
  EMPTY_FILE: 'input',
  HEADER_ONLY: 'input',
  NOT_A_TEXT_TABLE: 'input',
  NUL_BYTE: 'input',
  LINE_TOO_LONG: 'input',
  ENCODING_UTF32: 'input',
  ENCODING_UTF16_UNMARKED: 'input',
  ENCODING_MIXED: 'input',
  ENCODING_DAMAGED: 'input',
  DELIMITER_UNKNOWN: 'input',
  DECIMAL_MIXED: 'input',
  QUOTE_INVALID: 'input',
  QUOTE_UNCLOSED: 'input',
  COLUMN_MISSING: 'input',
  COLUMN_AMBIGUOUS: 'input',
  COLUMN_NOT_FOUND: 'input',
  COLUMN_MEANING_UNKNOWN: 'input',
  COLUMN_USED_TWICE: 'input',
  GEOJSON_TOO_LARGE: 'input',
  GEOJSON_NOT_JSON: 'input',
  GEOJSON_NOT_COLLECTION: 'input',
  GEOJSON_CRS: 'input',
  GEOJSON_NO_POINTS: 'input',
  // stations: networks
  SEASON_INVALID: 'input',
  SEASON_OF_ANNUAL_MEANS: 'input',
  SEASON_NEEDS_MONTHS: 'input',
  SEASON_NOT_IN_TABLE: 'input',
  SEASON_UNDECIDED: 'input',
  YEARS_INVALID: 'input',
  YEARS_NEED_DATES: 'input',
  YEARS_NOT_IN_TABLE: 'input',
  // isoscape
  TERM_UNKNOWN: 'input',
  ISOTOPE_MISSING: 'input',
  COVARIATE_NAME_INVALID: 'input',
  COVARIATE_TWICE: 'input',
  COVARIATE_MISSING: 'input',
  COVARIATE_CONSTANT: 'input',
  COVARIATE_COLLINEAR: 'input',
  COVARIATE_UNKNOWN: 'input',
  ISOSCAPE_NOT_JSON: 'input',
  ISOSCAPE_DAMAGED: 'input',
  ISOSCAPE_OLDER: 'input',
  ISOSCAPE_NEWER: 'input',
  // raster
  RASTER_NOT_TIFF: 'input',
  RASTER_TRUNCATED: 'input',
  RASTER_DAMAGED: 'input',
  RASTER_BANDS: 'input',
  CRS_MISSING: 'input',
  CRS_UNKNOWN: 'input',
  CRS_WRONG: 'input',
  CRS_UNSUPPORTED: 'input',
  TRANSFORM_MISSING: 'input',
  TRANSFORM_ROTATED: 'input',
  ELEVATION_UNIT: 'input',
  ELEVATION_EMPTY: 'input',
  ELEVATION_IMPLAUSIBLE: 'input',
  ELEVATION_TOO_FINE: 'input',
  COVARIATE_EMPTY: 'input',
  GRID_TOO_LARGE: 'input',
  // jobs
  BOUNDS_INVALID: 'input',
  CELL_INVALID: 'input',
  MASK_INVALID: 'input',
  MASK_OUTSIDE: 'input',
  GRID_EMPTY: 'input',
  BAND_UNKNOWN: 'input',
  AREA_INVALID: 'input',
  AREA_VALUES_MISSING: 'input',
  AREA_WEIGHT_NEGATIVE: 'input',
  AREA_WEIGHT_ZERO: 'input',
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
