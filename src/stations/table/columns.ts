import { RainprintError } from '../../errors.js';
import { headerKey, type Vocabulary } from './vocabulary.js';

/** `{ lat: 'Breite' }`: the column of that header has that meaning; an empty header says "there is no such column". */
export type ColumnOverrides = Readonly<Record<string, string>>;

/**
 * Finds which column has which meaning. Overrides come first, then the vocabulary's tiers in its own order.
 *
 * @param yielding columns that get a meaning only where no other column has it
 * @returns the 0-based column of each meaning found; meanings without a column are not in the map
 * @throws COLUMN_AMBIGUOUS (two headers for one meaning), COLUMN_NOT_FOUND, COLUMN_MEANING_UNKNOWN,
 *   COLUMN_USED_TWICE (overrides)
 */
export function findColumns<M extends string>(
  header: readonly string[],
  vocabulary: Vocabulary<M>,
  overrides: ColumnOverrides = {},
  yielding: ReadonlySet<number> = new Set(),
): Map<M, number> {
  const found = new Map<M, number>();
  const closed = new Set<M>();
  for (const [word, wanted] of Object.entries(overrides)) {
    const meaning = meaningOf(word, vocabulary);
    if (closed.has(meaning)) {
      throw new RainprintError('COLUMN_USED_TWICE', `column meaning ${meaning} is given twice`, { meaning });
    }
    closed.add(meaning);
    if (wanted.trim() !== '') found.set(meaning, overriddenColumn(header, wanted, meaning, found));
  }
  const keys = header.map(headerKey);
  const taken = new Set(found.values());
  for (const meaning of Object.keys(vocabulary) as M[]) {
    if (closed.has(meaning)) continue;
    const column =
      columnByTiers(header, keys, new Set([...taken, ...yielding]), meaning, vocabulary) ??
      columnByTiers(header, keys, taken, meaning, vocabulary);
    if (column === null) continue;
    found.set(meaning, column);
    taken.add(column);
  }
  return found;
}

/** How many meanings a header would give; used to choose between delimiters. Never throws. */
export function countKnownHeaders<M extends string>(
  header: readonly string[],
  vocabulary: Vocabulary<M>,
): number {
  const known = new Set((Object.keys(vocabulary) as M[]).flatMap((m) => vocabulary[m].tiers.flat()));
  return header.filter((text) => known.has(headerKey(text))).length;
}

function columnByTiers<M extends string>(
  header: readonly string[],
  keys: readonly string[],
  taken: ReadonlySet<number>,
  meaning: M,
  vocabulary: Vocabulary<M>,
): number | null {
  for (const tier of vocabulary[meaning].tiers) {
    const matches = keys.flatMap((key, i) => (!taken.has(i) && tier.includes(key) ? [i] : []));
    if (matches.length === 1) return matches[0];
    if (matches.length > 1) {
      const names = matches.map((i) => `"${header[i].trim()}"`).join(' and ');
      throw new RainprintError(
        'COLUMN_AMBIGUOUS',
        `columns ${names} could both be ${meaning}; say which with --column ${meaning}=Header`,
        { meaning, headers: matches.map((i) => header[i].trim()) },
      );
    }
  }
  return null;
}

function meaningOf<M extends string>(word: string, vocabulary: Vocabulary<M>): M {
  const meanings = Object.keys(vocabulary) as M[];
  const key = headerKey(word);
  const match =
    meanings.find((m) => m === word) ??
    meanings.find((m) => headerKey(m) === key || vocabulary[m].tiers[0].includes(key));
  if (match === undefined) {
    throw new RainprintError(
      'COLUMN_MEANING_UNKNOWN',
      `no column meaning is called "${word}"; the meanings are ${meanings.join(', ')}`,
      { meaning: word, meanings },
    );
  }
  return match;
}

function overriddenColumn<M extends string>(
  header: readonly string[],
  wanted: string,
  meaning: M,
  found: ReadonlyMap<M, number>,
): number {
  const exact = indicesWhere(header, (text) => text.trim() === wanted.trim());
  const matches =
    exact.length > 0 ? exact : indicesWhere(header, (text) => headerKey(text) === headerKey(wanted));
  if (matches.length === 0) {
    throw new RainprintError(
      'COLUMN_NOT_FOUND',
      `there is no column "${wanted}" for ${meaning}; the header has ${quotedList(header)}`,
      { meaning, wanted },
    );
  }
  if (matches.length > 1) {
    throw new RainprintError(
      'COLUMN_AMBIGUOUS',
      `the header has "${wanted}" (for ${meaning}) ${matches.length} times; give each column its own name`,
      { meaning, wanted },
    );
  }
  for (const [other, column] of found) {
    if (column === matches[0]) {
      throw new RainprintError(
        'COLUMN_USED_TWICE',
        `column "${wanted}" is given for both ${other} and ${meaning}; one column has one meaning`,
        { meaning, other },
      );
    }
  }
  return matches[0];
}

function indicesWhere(header: readonly string[], test: (text: string) => boolean): number[] {
  return header.flatMap((text, i) => (test(text) ? [i] : []));
}

/** The header as a message may show it: quoted, and cut where it is long. */
export function quotedList(header: readonly string[], limit = 30): string {
  const shown = header.slice(0, limit).map((text) => `"${text.trim().slice(0, 60)}"`);
  return shown.join(', ') + (header.length > limit ? ` and ${header.length - limit} more` : '');
}
