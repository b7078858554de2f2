import { createHash } from 'node:crypto';
import { type ErrorCode, RainprintError } from '../../errors.js';
import { createSupport, type Isoscape, readIsoscape, type Support } from '../../isoscape/index.js';
import { impossibleValue } from '../../isoscape/possible-value.js';
import { type AreaAverage, averageOverArea } from '../../jobs/area-average.js';
import { parseAreaShape } from '../../jobs/area-shape.js';
import type { CliContext } from '../context.js';
import { readInputText } from '../input-file.js';
import { createProgress } from '../progress.js';
import { openRunOutputs } from '../run-outputs.js';
import { areaProblemValues, areaValues } from './area-columns.js';
import type { AreaOptions } from './area-options.js';
import { areaRecord } from './area-record.js';
import { type OpenAreaSources, openAreaSources } from './area-sources.js';
import { AreaTally } from './area-tally.js';
import { createAreaWriter } from './area-writers.js';
import { type AreaFeature, readAreas } from './areas-file.js';

/** An isoscape of 10,000 stations takes some 4 MB. */
const MAX_ISOSCAPE_BYTES = 256 << 20;
/** The longest text Node.js can hold is about twice this. */
const MAX_AREAS_BYTES = 256 << 20;
/** What is wrong with one area only; any other error ends the run. */
const OF_ONE_AREA: readonly ErrorCode[] = [
  'AREA_INVALID',
  'AREA_VALUES_MISSING',
  'AREA_WEIGHT_NEGATIVE',
  'AREA_WEIGHT_ZERO',
];

export interface AreaCall {
  readonly isoscapePath: string;
  readonly areasPath: string;
  readonly options: AreaOptions;
}

interface Work {
  readonly isoscape: Isoscape;
  readonly support: Support;
  readonly sources: OpenAreaSources;
  readonly options: AreaOptions;
}

type Outcome = { readonly problem: null; readonly average: AreaAverage } | { readonly problem: string };

/** Reads areas, averages the isoscape over each, writes them as they come. */
export async function runArea(call: AreaCall, context: CliContext): Promise<void> {
  const { options } = call;
  const isoscapeText = await readInputText(call.isoscapePath, MAX_ISOSCAPE_BYTES);
  const isoscape = readIsoscape(isoscapeText);
  const areasText = await readInputText(call.areasPath, MAX_AREAS_BYTES);
  const features = readAreas(areasText, call.areasPath);
  const sources = await openAreaSources(isoscape, options);
  const tally = new AreaTally();
  try {
    for (const note of sources.notes) context.stderr.write(`rainprint: note: ${note}\n`);
    const inputs = [call.isoscapePath, call.areasPath, ...sources.paths];
    const outputs = await openRunOutputs(options, inputs, context, async (run) => {
      await run.openRecord();
      return run;
    });
    try {
      const work = { isoscape, support: createSupport(isoscape), sources, options };
      await writeAreas(work, features, outputs.write, tally, context);
      const facts = {
        ...call,
        isoscape,
        isoscapeSha256: sha256(isoscapeText),
        areasSha256: sha256(areasText),
        sources: sources.names,
        areaCount: tally.areaCount,
        problemCount: tally.problemCount,
        toolVersion: context.toolVersion,
      };
      await outputs.commit((outputSha256) => areaRecord({ ...facts, outputSha256 }, options));
    } finally {
      await outputs.abort();
    }
  } finally {
    await sources.close();
  }
  tally.report(options, context);
}

async function writeAreas(
  work: Work,
  features: readonly AreaFeature[],
  write: (text: string) => Promise<void>,
  tally: AreaTally,
  context: CliContext,
): Promise<void> {
  const { isoscape, sources, options } = work;
  const progress = createProgress(context, 'area');
  const writer = createAreaWriter(options.format, features, isoscape);
  await write(writer.start());
  for (const feature of features) {
    progress.update(tally.areaCount, features.length);
    const outcome = await averageOf(work, feature);
    const added =
      outcome.problem === null
        ? areaValues(isoscape, outcome.average, sources.names, options.level)
        : areaProblemValues(isoscape, outcome.problem);
    await write(writer.row(feature, added));
    if (outcome.problem === null) tally.addAverage(feature, outcome.average);
    else tally.addProblem(feature, outcome.problem);
  }
  await write(writer.end());
  progress.end();
}

async function averageOf(work: Work, feature: AreaFeature): Promise<Outcome> {
  const { isoscape, support, sources, options } = work;
  try {
    const shape = await parseAreaShape(feature.geometry, feature.where);
    const average = await averageOverArea(isoscape, support, shape, sources, options.plugIn);
    const { d18O, d2H } = average.prediction;
    const reason = impossibleValue(isoscape.isotopes, d18O, d2H);
    return reason === null ? { problem: null, average } : { problem: `prediction-impossible: ${reason}` };
  } catch (error) {
    if (!(error instanceof RainprintError) || !OF_ONE_AREA.includes(error.code)) throw error;
    return { problem: `${error.code.toLowerCase().replaceAll('_', '-')}: ${error.message}` };
  }
}

function sha256(text: string): string {
  return createHash('sha256').update(text).digest('hex');
}
