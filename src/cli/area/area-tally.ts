import { AREA_POINTS, type AreaAverage } from '../../jobs/area-average.js';
import type { CliContext } from '../context.js';
import { EXIT_CODES } from '../failure.js';
import type { AreaOptions } from './area-options.js';
import type { AreaFeature } from './areas-file.js';

/** Areas named on stderr; all stand in the output. */
const SHOWN = 5;

/** Counts what a reader must know of a run, and says it at its end. */
export class AreaTally {
  areaCount = 0;
  problemCount = 0;
  readonly #problems: string[] = [];
  readonly #unstable: string[] = [];
  readonly #missing: string[] = [];
  readonly #flags = new Map<string, number>();
  #flaggedCount = 0;

  addAverage(feature: AreaFeature, average: AreaAverage): void {
    this.areaCount++;
    if (!average.stable) this.#unstable.push(feature.where);
    if (average.missingShare > 0) {
      this.#missing.push(`${feature.where}: ${(100 * average.missingShare).toFixed(1)} %`);
    }
    if (average.flags.length > 0) this.#flaggedCount++;
    for (const { flag } of average.flags) this.#flags.set(flag, (this.#flags.get(flag) ?? 0) + 1);
  }

  addProblem(feature: AreaFeature, problem: string): void {
    this.areaCount++;
    this.problemCount++;
    this.#problems.push(problem.includes(feature.where) ? problem : `${feature.where}: ${problem}`);
  }

  /** Problems make the exit code 2, unless the user said that they may be skipped. */
  report(options: AreaOptions, context: CliContext): void {
    const { stderr } = context;
    const note = (text: string, list: readonly string[] = []) => {
      stderr.write(`rainprint: ${text}\n`);
      for (const line of list.slice(0, SHOWN)) stderr.write(`  ${line.replace(/[\r\n]+/g, ' ')}\n`);
      if (list.length > SHOWN) stderr.write(`  and ${list.length - SHOWN} more\n`);
    };
    const of = `of ${this.areaCount} areas`;
    if (this.#flaggedCount > 0) {
      const counts = [...this.#flags].map(([flag, count]) => `${flag} ${count}`).join(', ');
      note(`note: ${this.#flaggedCount} ${of} lean on little somewhere (support, support_share): ${counts}`);
    }
    if (this.#unstable.length > 0) {
      const text = `${this.#unstable.length} ${of} are not stable to 1 % at ${AREA_POINTS.most} points (stable)`;
      note(`note: ${text}`, this.#unstable);
    }
    if (this.#missing.length > 0) {
      const text = 'some of their land has no value in a raster and is left out (missing_share)';
      note(`note: ${this.#missing.length} ${of}: ${text}`, this.#missing);
    }
    if (this.problemCount === 0) return;
    const label = options.skipBad ? 'note' : 'AREAS_WITH_PROBLEMS';
    note(`${label}: ${this.problemCount} ${of} have no prediction (problem)`, this.#problems);
    if (!options.skipBad) context.setExitCode(EXIT_CODES.input);
  }
}
