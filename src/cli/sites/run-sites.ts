import { createHash } from 'node:crypto';
import {
  createSupport,
  type Isoscape,
  keepsFactors,
  nearestErrorOf,
  readIsoscape,
} from '../../isoscape/index.js';
import { bundledElevationPath } from '../../raster/index.js';
import { type ColumnOverrides, openTable, type Table } from '../../stations/index.js';
import type { CliContext } from '../context.js';
import { openInput, readInputText } from '../input-file.js';
import { nearestNote } from '../nearest-note.js';
import { createProgress } from '../progress.js';
import { noteMissingElevation } from './elevation-note.js';
import { createExplainer } from './explanations.js';
import { assertJointSize, MAX_JOINT_SITES, writeJoint } from './joint-file.js';
import { isNearStations, MisplacedSites } from './misplaced-sites.js';
import { hashed, runRecord } from './run-record.js';
import { createSiteCovariates, type SiteCovariates } from './site-covariates.js';
import { createSiteElevations } from './site-elevation.js';
import { createSitePredictor } from './site-predictor.js';
import { createSiteReader, type SiteRow } from './site-reader.js';
import {
  covariateMeaning,
  earlierElevation,
  SITE_PLACE,
  type SiteMeaning,
  siteVocabulary,
} from './site-vocabulary.js';
import { createSitesWriter } from './site-writers.js';
import type { SitesOptions } from './sites-options.js';
import { openSitesOutputs, type SitesOutputs } from './sites-outputs.js';
import { SitesTally } from './sites-tally.js';

/** An isoscape of 10,000 stations takes some 4 MB. */
const MAX_ISOSCAPE_BYTES = 256 << 20;
/** Enough to keep the numeric core busy, few enough to keep memory flat. */
const BATCH_ROWS = 1024;
/** Where every batch factorises anew: with so many rows that is a small part of its work, and they take 120 MB (measured). */
const LARGE_BATCH_ROWS = 65_536;

export interface SitesCall {
  readonly isoscapePath: string;
  readonly sitesPath: string;
  readonly columns: ColumnOverrides;
  readonly options: SitesOptions;
}

/** Reads sites, predicts them batch by batch, writes each batch once it is predicted. */
export async function runSites(call: SitesCall, context: CliContext): Promise<void> {
  const { options } = call;
  const input = await openSites(call);
  const { isoscape } = input;
  const elevations = await createSiteElevations(options.elevationPath, isoscape.terms.includes('elevation'));
  const tally = new SitesTally();
  const misplaced = new MisplacedSites(input.support);
  let covariates: SiteCovariates | null = null;
  try {
    covariates = await createSiteCovariates(isoscape, options.covariateFiles, input.covariatesInTable);
    for (const note of covariates.notes) context.stderr.write(`rainprint: note: ${note}\n`);
    const elevationPath = options.elevationPath ?? bundledElevationPath();
    const outputs = await openSitesOutputs(
      options,
      [call.isoscapePath, call.sitesPath, elevationPath, ...options.covariateFiles.map(({ path }) => path)],
      context,
    );
    try {
      const predict = createSitePredictor(isoscape, input.support, elevations, covariates, options);
      await streamSites({ ...input, predict, outputs, options, tally, misplaced, context });
      const nearestError = nearestErrorOf(isoscape, options.stations);
      if (nearestError !== null) {
        const note = nearestNote(nearestError, isoscape.stations.id.length, 'sites');
        context.stderr.write(`rainprint: ${note}\n`);
      }
      const facts = {
        ...call,
        isoscape,
        isoscapeSha256: input.isoscapeSha256,
        nearestError,
        sitesSha256: await input.source.digest(),
        elevationGrid: elevations.gridSource(),
        covariateRasters: covariates.rasters,
        siteCount: tally.rowCount,
        problemCount: tally.problemCount,
        toolVersion: context.toolVersion,
      };
      await outputs.commit((outputSha256) => runRecord({ ...facts, outputSha256 }, options));
    } finally {
      await outputs.abort();
    }
  } finally {
    await covariates?.close();
    await elevations.close();
  }
  const gridUsed = isoscape.terms.includes('elevation') ? elevations.gridSource() : null;
  noteMissingElevation(input.table, isoscape.covariates, call.columns, gridUsed, context);
  misplaced.report(context);
  tally.report(options, context);
}

async function openSites(call: SitesCall) {
  const isoscapeText = await readInputText(call.isoscapePath, MAX_ISOSCAPE_BYTES);
  const isoscape = readIsoscape(isoscapeText);
  const covariateNames = isoscape.covariates.map(({ name }) => name);
  const source = hashed(await openInput(call.sitesPath));
  const table = await openTable<SiteMeaning>(source.chunks, {
    vocabulary: siteVocabulary(covariateNames),
    columnOverrides: call.columns,
    placeMeanings: SITE_PLACE,
    yieldingColumns: earlierElevation,
  });
  const support = createSupport(isoscape);
  return {
    isoscape,
    support,
    isoscapeSha256: createHash('sha256').update(isoscapeText).digest('hex'),
    source,
    table,
    covariatesInTable: covariateNames.filter((name) => table.columns.has(covariateMeaning(name))),
    readRow: createSiteReader(table, covariateNames, (lonDeg, latDeg) =>
      isNearStations(support, lonDeg, latDeg),
    ),
  };
}

interface Stream {
  readonly isoscape: Isoscape;
  readonly table: Table<SiteMeaning>;
  readonly readRow: ReturnType<typeof createSiteReader>;
  readonly predict: ReturnType<typeof createSitePredictor>;
  readonly outputs: SitesOutputs;
  readonly options: SitesOptions;
  readonly tally: SitesTally;
  readonly misplaced: MisplacedSites;
  readonly context: CliContext;
}

async function streamSites(stream: Stream): Promise<void> {
  const { isoscape, outputs, options, tally } = stream;
  const progress = createProgress(stream.context, 'sites');
  const writer = createSitesWriter(options.format, stream.table, isoscape);
  const explainer = outputs.explain === null ? null : createExplainer(isoscape, outputs.explain);
  const batchRows = batchRowsOf(isoscape, outputs, options);
  let started = false;
  for await (const rows of batches(stream.table.rows, stream.readRow, batchRows)) {
    if (outputs.joint !== null) assertJointSize(rows.length);
    const batch = await stream.predict(rows);
    const text = started ? '' : writer.start();
    started = true;
    await outputs.main.write(text + rows.map((row, i) => writer.row(row, batch.added[i])).join(''));
    await explainer?.write(batch);
    if (outputs.joint !== null) await writeJoint(outputs.joint, isoscape, batch.sites, batch.places, options);
    tally.add(rows, batch);
    stream.misplaced.add(rows);
    progress.update(tally.rowCount, 0);
  }
  await outputs.main.write(writer.end());
  await explainer?.end();
  progress.end();
}

function batchRowsOf(isoscape: Isoscape, { joint }: SitesOutputs, options: SitesOptions): number {
  // The joint covariance needs all sites at once, and its limit must speak before anything is written.
  if (joint !== null) return MAX_JOINT_SITES + 1;
  return keepsFactors(isoscape, options) ? BATCH_ROWS : LARGE_BATCH_ROWS;
}

async function* batches(
  rows: Table<SiteMeaning>['rows'],
  readRow: ReturnType<typeof createSiteReader>,
  size: number,
): AsyncGenerator<readonly SiteRow[]> {
  let batch: SiteRow[] = [];
  for await (const row of rows) {
    batch.push(readRow(row));
    if (batch.length < size) continue;
    yield batch;
    batch = [];
  }
  if (batch.length > 0) yield batch;
}
