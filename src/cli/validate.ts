import { basename } from 'node:path';
import { type Command, Option } from 'commander';
import { RainprintError } from '../errors.js';
import { type Isoscape, readIsoscape } from '../isoscape/index.js';
import { type ValidateOptions, validateIsoscape } from '../isoscape/validate.js';
import type { ValidationResult } from '../isoscape/validation.js';
import type { CliContext } from './context.js';
import { readInputText } from './input-file.js';
import { type OutputFile, openOutput } from './output-file.js';
import { createProgress } from './progress.js';
import { requireDistinct } from './run-outputs.js';
import { parseLevel } from './sites/sites-options.js';
import { writeText } from './stream-write.js';
import { rerunCommand } from './validate/rerun-command.js';
import { validationJson } from './validate/validation-json.js';
import { validationText } from './validate/validation-text.js';

interface ValidateFlags {
  readonly folds?: string;
  readonly level: string;
  readonly plugIn?: true;
  readonly json?: true;
  readonly output?: string;
  readonly report?: string;
}

/** An isoscape of 10,000 stations takes some 4 MB. */
const MAX_ISOSCAPE_BYTES = 256 << 20;

const HELP = `
Each station is predicted from all others (leave-one-out), then whole blocks of stations from an
isoscape fitted anew to the rest; both beside three simple predictors: the mean of the stations,
the regression on the trend terms alone, and the nearest station.

RMSE, MAE, bias (predicted - observed) and CRPS in per mil, lower is better; z is (observed -
predicted) / SD, its mean square 1 where the stated errors are right; "covers" is the share of
observed means within the interval of that level.

Examples:
  rainprint validate isoscape.json
  rainprint validate isoscape.json --folds 5 --level 0.95 --report report.html
  rainprint validate isoscape.json --json -o scores.json`;

/** `rainprint validate`: how well an isoscape predicts stations it was not given. */
export function registerValidate(program: Command, context: CliContext): void {
  program
    .command('validate')
    .description('score an isoscape on its own stations, held out one by one and in blocks')
    .argument('<isoscape>', 'isoscape file made by fit')
    .addOption(new Option('--folds <count>', 'spatial blocks (default: 10, at most half the stations)'))
    .option('--level <level>', 'level of the intervals, between 0 and 1', '0.9')
    .option('--plug-in', 'take estimated parameters for known (for comparison with other programs)')
    .option('--json', 'everything as JSON, the predictions of each station too')
    .option('-o, --output <file>', 'write here (default: standard output)')
    .option('--report <file>', 'write a page with plots (one HTML file that prints well)')
    .addHelpText('after', HELP)
    .action((path: string, flags: ValidateFlags) => runValidate(path, flags, context));
}

async function runValidate(path: string, flags: ValidateFlags, context: CliContext): Promise<void> {
  const options = readOptions(flags);
  const isoscape = readIsoscape(await readInputText(path, MAX_ISOSCAPE_BYTES));
  const outputs: OutputFile[] = [];
  try {
    // Opened first: an unwritable path is said before the refits, not after them.
    const scoresFile = flags.output === undefined ? null : await openOutput(flags.output, [path]);
    if (scoresFile !== null) outputs.push(scoresFile);
    const reportFile = flags.report === undefined ? null : await openOutput(flags.report, [path]);
    if (reportFile !== null) outputs.push(reportFile);
    const result = validateWithProgress(isoscape, options, context);
    const scores = flags.json ? validationJson(isoscape, result) : validationText(isoscape, result);
    if (reportFile !== null) {
      const command = rerunCommand(basename(path), result, basename(reportFile.path));
      // Loaded here: the plotting library would slow the start of every other call.
      const { validationPage } = await import('../report/validation-page.js');
      await reportFile.write(validationPage(isoscape, result, { toolVersion: context.toolVersion, command }));
    }
    await scoresFile?.write(scores);
    for (const file of outputs) await file.commit();
    if (scoresFile === null) await writeText(context.stdout, scores);
  } finally {
    for (const file of outputs) await file.abort();
  }
}

function validateWithProgress(
  isoscape: Isoscape,
  options: ValidateOptions,
  context: CliContext,
): ValidationResult {
  const progress = createProgress(context, 'validating');
  try {
    return validateIsoscape(isoscape, options, ({ stage, done, total }) =>
      progress.update(done, total, stage),
    );
  } finally {
    progress.end();
  }
}

function readOptions(flags: ValidateFlags): ValidateOptions {
  requireDistinct([flags.report, flags.output]);
  return {
    level: parseLevel(flags.level),
    plugIn: flags.plugIn === true,
    ...(flags.folds === undefined ? {} : { folds: parseFolds(flags.folds) }),
  };
}

/** A whole number; how many folds the stations allow is checked where they are known. */
function parseFolds(text: string): number {
  if (/^\d{1,9}$/.test(text.trim())) return Number(text);
  throw new RainprintError('OPTION_INVALID', `--folds ${text}: give a whole number of at least 2`, {
    value: text,
  });
}
