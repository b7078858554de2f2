/**
 * How columns are found by what they mean: a vocabulary lists for each meaning the spellings people use, in tiers.
 * Spellings are compared by `headerKey`, so `δ18O (‰)`, `d18O`, `delta_18O` and `D18O [permil]` are one.
 */
export interface MeaningSpec {
  readonly kind: 'number' | 'text';
  /** Tiers of spellings (as `headerKey` gives them): a later tier is asked only where no earlier one matches. */
  readonly tiers: readonly (readonly string[])[];
}

/** Meanings are matched in the order of the vocabulary's keys; a column serves one meaning only. */
export type Vocabulary<M extends string> = Readonly<Record<M, MeaningSpec>>;

/** Units that say what we expect anyway. Any other unit stays in the key, so that `elevation (ft)` finds nothing. */
const EXPECTED_UNITS = new Set([
  ...['permil', 'permill', 'permille', 'promille', 'permilvsmow', 'permillvsmow', 'permilvsmowslap', 'vsmow'],
  ...['smow', 'vsmowslap', 'vsmowpermil', 'ooo', 'o00', '000', 'pmil', '‰', '‰vsmow', '‰vsmowslap', 'vsmow‰'],
  ...[
    'm',
    'masl',
    'meter',
    'meters',
    'metre',
    'metres',
    'mamsl',
    'mm',
    'millimeter',
    'millimetre',
    'mmmonth',
  ],
  ...[
    'deg',
    'degree',
    'degrees',
    'dd',
    'decimaldegrees',
    'decimaldeg',
    'degn',
    'dege',
    '°',
    '°n',
    '°e',
    'wgs84',
  ],
]);

const BRACKETED = /[([{<]([^)\]}>]*)[)\]}>]/g;

/**
 * The key two spellings of a header share: compatibility forms folded (superscripts to digits), lower case, delta
 * and δ to d, an expected unit in brackets dropped, everything but letters, digits and ‰ dropped.
 */
export function headerKey(header: string): string {
  const folded = header.normalize('NFKC').toLowerCase();
  const unitless = folded.replace(BRACKETED, (whole, inner: string) =>
    EXPECTED_UNITS.has(squeezed(inner)) ? ' ' : whole,
  );
  return squeezed(unitless);
}

function squeezed(text: string): string {
  return text.replace(/delta|[δ∂]/g, 'd').replace(/[^\p{L}\p{N}‰°]/gu, '');
}

/**
 * The spellings of a tier with each of the suffixes an expected unit may take without brackets (`elevation_m`); plain
 * ones first, as messages show the beginning of a tier.
 */
export function withSuffixes(keys: readonly string[], suffixes: readonly string[]): string[] {
  return [...keys, ...keys.flatMap((key) => suffixes.map((suffix) => key + suffix))];
}
