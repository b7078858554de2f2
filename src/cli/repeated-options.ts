import { RainprintError } from '../errors.js';
import type { ColumnOverrides } from '../stations/index.js';

/** Commander's collector for an option that may be given several times. */
export function collected(value: string, previous: readonly string[]): string[] {
  return [...previous, value];
}

/** `lat=Breite` and its like as a map from meaning to header. The header may itself hold an equals sign. */
export function columnOverrides(texts: readonly string[]): ColumnOverrides {
  const overrides: Record<string, string> = Object.create(null);
  for (const text of texts) {
    const at = text.indexOf('=');
    if (at < 1) {
      throw new RainprintError(
        'OPTION_INVALID',
        `--column ${text}: expected MEANING=HEADER, such as lat=Breite`,
        {
          value: text,
        },
      );
    }
    const meaning = text.slice(0, at).trim();
    if (meaning in overrides) {
      throw new RainprintError('OPTION_INVALID', `--column ${meaning} is given twice`, { value: text });
    }
    overrides[meaning] = text.slice(at + 1);
  }
  return overrides;
}
