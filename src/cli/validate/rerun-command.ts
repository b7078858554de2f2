import type { ValidationResult } from '../../isoscape/validation.js';

/** The call that makes the same report again, as one line a POSIX shell takes. */
export function rerunCommand(isoscapeName: string, result: ValidationResult, reportPath: string): string {
  return [
    'rainprint validate',
    shellWord(isoscapeName),
    `--folds ${result.folds.length}`,
    `--level ${result.level}`,
    ...(result.plugIn ? ['--plug-in'] : []),
    ...(reportPath === '' ? [] : [`--report ${shellWord(reportPath)}`]),
  ].join(' ');
}

/** Plain words stay as they are; anything else stands in single quotes. */
function shellWord(word: string): string {
  if (/^[\w./][\w./-]*$/.test(word)) return word;
  const quoted = `'${word.replaceAll("'", "'\\''")}'`;
  return word.startsWith('-') ? `./${quoted}` : quoted; // a file name must not look like an option
}
