/**
 * Bounds of what a station table may hold. They catch typing errors, swapped columns and wrong units; they do not
 * judge the weather. Each has its reason beside it.
 */

/**
 * δ18O of precipitation, ‰. Lowest daily snow on the East Antarctic plateau is reported near −82 (Fujita & Abe 2006,
 * from memory); strongly evaporated desert showers reach about +15 to +20 (from memory). No measurement is known beyond.
 */
export const D18O_BOUNDS = { min: -85, max: 25 } as const;

/** δ2H, ‰: the same snow near −595, the same showers below +120 (from memory). */
export const D2H_BOUNDS = { min: -620, max: 160 } as const;

/** Station means with a d-excess outside are flagged (science sheet section 7; common practice). */
export const STATION_D_EXCESS = { min: -10, max: 30 } as const;

/** Single records outside are flagged: small evaporated rains and polar snow come near (common practice, no source). */
export const RECORD_D_EXCESS = { min: -40, max: 50 } as const;

/** Beyond this a pair is no natural water but swapped columns or a slip of sign or digit (common practice, no source). */
export const POSSIBLE_D_EXCESS = { min: -100, max: 100 } as const;

/** Dry land lies between the Dead Sea shore (about −430 m) and the highest summit (8849 m), rounded outwards. */
export const ELEVATION_BOUNDS = { min: -450, max: 8850 } as const;

/** Most rain ever measured in twelve months is about 26,500 mm (from memory): nothing in a table is above. */
export const LARGEST_AMOUNT_MM = 30_000;

/** Two collectors closer than this are one place to a model of kilometres. */
export const SAME_PLACE_M = 100;

/** Elevations given for one station may differ by rounding and instruments, hardly by more (common practice). */
export const SAME_ELEVATION_M = 50;

export interface Bounds {
  readonly min: number;
  readonly max: number;
}

/** False for NaN: missing values are the caller's matter. */
export function isOutside(value: number, bounds: Bounds): boolean {
  return value < bounds.min || value > bounds.max;
}
