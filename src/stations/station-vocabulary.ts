import { type Vocabulary, withSuffixes } from './table/index.js';

/** What a column of a station table may mean. */
export type StationMeaning =
  | 'id'
  | 'name'
  | 'lon'
  | 'lat'
  | 'elevation'
  | 'd18O'
  | 'd2H'
  | 'sd_d18O'
  | 'sd_d2H'
  | 'se_d18O'
  | 'se_d2H'
  | 'n'
  | 'precipitation'
  | 'month'
  | 'year'
  | 'date'
  | 'season';

const PERMIL = [
  'permil',
  'permill',
  'permille',
  'promille',
  '‰',
  'vsmow',
  'permilvsmow',
  '‰vsmow',
  'vsmowpermil',
];
/** Keys of δ18O and δ2H as `headerKey` leaves them: δ18O, d18O, delta_18O, O18, d_O18; δ2H, dD, δD, deltaD, dH2. */
const D18O = [
  'd18o',
  'do18',
  '18o',
  'o18',
  'd18oh2o',
  'd18oprecip',
  'd18owater',
  'd18orain',
  'd18omean',
  'meand18o',
];
const D2H = [
  'd2h',
  'dd',
  'dh2',
  '2h',
  'h2',
  'd2hh2o',
  'd2hprecip',
  'd2hwater',
  'd2hrain',
  'd2hmean',
  'meand2h',
  'ddmean',
];
const SHORT_D18O = ['d18o', '18o', 'do18', 'o18'];
const SHORT_D2H = ['d2h', '2h', 'dd', 'dh2', 'h2'];
const SD_WORDS = ['sd', 'std', 'stdev', 'stddev', 'sigma', 'standarddeviation'];
const SE_WORDS = ['se', 'sem', 'stderr', 'stderror', 'standarderror'];

/** `sd_d18O`, `d18O_sd`, `SD d18O (‰)` … */
function spreadKeys(words: readonly string[], isotopes: readonly string[]): string[] {
  const keys = isotopes.flatMap((isotope) => words.flatMap((word) => [word + isotope, isotope + word]));
  return withSuffixes(keys, ['permil', '‰']);
}

/**
 * Spellings by meaning, as `headerKey` leaves them (lower case, without signs, expected units in brackets dropped).
 * A unit we do not expect (`elevation_ft`, `precip_in`) matches nothing on purpose. English only; other languages by
 * `--column`.
 */
export const STATION_VOCABULARY: Vocabulary<StationMeaning> = {
  id: {
    kind: 'text',
    tiers: [
      ['id', 'stationid', 'siteid', 'gaugeid'],
      ['code', 'stationcode', 'sitecode', 'stationno', 'stationnumber'],
      ['station', 'site', 'collector', 'gauge'],
      ['name', 'stationname', 'sitename'],
    ],
  },
  name: {
    kind: 'text',
    tiers: [
      ['name', 'stationname', 'sitename'],
      ['station', 'site', 'label', 'place'],
    ],
  },
  lon: {
    kind: 'number',
    tiers: [
      withSuffixes(
        ['lon', 'long', 'lng', 'longitude', 'decimallongitude'],
        ['deg', 'dd', 'wgs84', 'degrees', '°'],
      ),
    ],
  },
  lat: {
    kind: 'number',
    tiers: [withSuffixes(['lat', 'latitude', 'decimallatitude'], ['deg', 'dd', 'wgs84', 'degrees', '°'])],
  },
  elevation: {
    kind: 'number',
    tiers: [
      withSuffixes(
        ['elev', 'elevation', 'alt', 'altitude', 'height', 'masl'],
        ['m', 'masl', 'meters', 'metres'],
      ),
    ],
  },
  d18O: { kind: 'number', tiers: [withSuffixes(D18O, PERMIL)] },
  d2H: { kind: 'number', tiers: [withSuffixes(D2H, PERMIL)] },
  sd_d18O: { kind: 'number', tiers: [spreadKeys(SD_WORDS, SHORT_D18O)] },
  sd_d2H: { kind: 'number', tiers: [spreadKeys(SD_WORDS, SHORT_D2H)] },
  se_d18O: { kind: 'number', tiers: [spreadKeys(SE_WORDS, SHORT_D18O)] },
  se_d2H: { kind: 'number', tiers: [spreadKeys(SE_WORDS, SHORT_D2H)] },
  n: {
    kind: 'number',
    tiers: [
      [
        'n',
        'nrecords',
        'nrecord',
        'recordcount',
        'records',
        'numberofrecords',
        'nsamples',
        'samplecount',
        'nobs',
      ],
      ['count', 'nmonths', 'numberofsamples'],
    ],
  },
  precipitation: {
    kind: 'number',
    tiers: [
      withSuffixes(
        [
          'precipitation',
          'precip',
          'precipitationamount',
          'precipamount',
          'ppt',
          'prcp',
          'rainfall',
          'amount',
        ],
        ['mm'],
      ),
      ['p', 'pmm', 'rain', 'rainmm', 'prec', 'precmm', 'rainamount', 'monthlyprecipitation'],
    ],
  },
  month: { kind: 'text', tiers: [['month', 'mon', 'monthno', 'calendarmonth']] },
  year: { kind: 'text', tiers: [['year', 'yr', 'calendaryear'], ['yyyy']] },
  date: {
    kind: 'text',
    tiers: [
      [
        'date',
        'sampledate',
        'samplingdate',
        'collectiondate',
        'yearmonth',
        'yyyymm',
        'yyyymmdd',
        'datecollected',
      ],
      ['datetime', 'timestamp'],
    ],
  },
  season: { kind: 'text', tiers: [['season', 'seasonmonths', 'monthsofseason']] },
};

/** The meanings GeoJSON geometry fills. */
export const STATION_PLACE = { lon: 'lon', lat: 'lat', elevation: 'elevation' } as const;
