import type { CliContext } from '../context.js';
import { EXIT_CODES } from '../failure.js';
import type { PredictedBatch } from './site-predictor.js';
import type { SiteRow } from './site-reader.js';
import type { SitesOptions } from './sites-options.js';

/** Rows named on stderr; all stand in the output's `problem` column. */
const SHOWN_PROBLEMS = 5;

/** Counts problems and support flags over a run, and says at its end what a reader must know. */
export class SitesTally {
  rowCount = 0;
  problemCount = 0;
  #flaggedCount = 0;
  readonly #flags = new Map<string, number>();
  readonly #firstProblems: string[] = [];

  add(rows: readonly SiteRow[], batch: PredictedBatch): void {
    for (const [i, problem] of batch.problems.entries()) {
      this.rowCount++;
      if (problem === null) continue;
      this.problemCount++;
      if (this.#firstProblems.length < SHOWN_PROBLEMS) {
        this.#firstProblems.push(`line ${rows[i].line}: ${problem}`);
      }
    }
    for (const flags of batch.flags) {
      if (flags.length > 0) this.#flaggedCount++;
      for (const flag of flags) this.#flags.set(flag, (this.#flags.get(flag) ?? 0) + 1);
    }
  }

  /** Problems make the exit code 2, unless the user said that they may be skipped. */
  report(options: SitesOptions, context: CliContext): void {
    const { stderr } = context;
    if (this.#flaggedCount > 0) {
      const counts = [...this.#flags].map(([flag, count]) => `${flag} ${count}`).join(', ');
      stderr.write(
        `rainprint: note: ${this.#flaggedCount} of ${this.rowCount} sites lean on little (column support): ${counts}\n`,
      );
    }
    if (this.problemCount === 0) return;
    const label = options.skipBad ? 'note' : 'SITES_WITH_PROBLEMS';
    stderr.write(
      `rainprint: ${label}: ${this.problemCount} of ${this.rowCount} rows have no prediction (column problem)\n`,
    );
    for (const problem of this.#firstProblems) stderr.write(`  ${problem.replace(/[\r\n]+/g, ' ')}\n`);
    const rest = this.problemCount - this.#firstProblems.length;
    if (rest > 0) stderr.write(`  and ${rest} more\n`);
    if (!options.skipBad) context.setExitCode(EXIT_CODES.input);
  }
}
