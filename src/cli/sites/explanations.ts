import { greatCircleKm } from '../../geostat/index.js';
import { type Explanation, explainPlaces, type Isoscape, type Places } from '../../isoscape/index.js';
import { dExcess } from '../../isotope/index.js';
import { decimals, textTable } from '../text-table.js';
import type { PredictedBatch } from './site-predictor.js';
import type { TextOutput } from './sites-outputs.js';

export interface Explainer {
  write(batch: PredictedBatch): Promise<void>;
  end(): Promise<void>;
}

interface Part {
  readonly trend: number;
  readonly residual: number;
}

/** One site's prediction taken apart, as it is written. */
interface ExplainedSite {
  readonly site: string;
  readonly lon: number;
  readonly lat: number;
  readonly elevation_m: number;
  /** Only where the isoscape has covariates. */
  readonly covariates?: Readonly<Record<string, number>>;
  /** ‰; only what the isoscape has. */
  readonly parts: Readonly<Record<string, Part>>;
  readonly stations: readonly {
    readonly id: string;
    readonly distance_km: number;
    readonly weight: Readonly<Record<string, number>>;
  }[];
}

/**
 * Writes explanations as they come: JSON into a file, tables where a person reads. They hold at the fitted parameters;
 * predictions average over parameters, so trend + residual may differ from the predicted value by a little.
 */
export function createExplainer(isoscape: Isoscape, output: TextOutput): Explainer {
  let separator = '';
  const head = { isoscape: isoscape.id, parameters: 'fitted (not averaged)', unit: 'permil VSMOW-SLAP' };
  const start = `${JSON.stringify(head).slice(0, -1)},"sites":[`;
  return {
    async write(batch) {
      const sites = explained(isoscape, batch);
      if (sites.length === 0) return;
      if (output.forPeople) return output.write(sites.map(siteText).join('\n'));
      const texts = sites.map((site) => {
        const text = `${separator}\n${JSON.stringify(site)}`;
        separator = ',';
        return text;
      });
      const first = texts[0].startsWith(',') ? '' : start;
      await output.write(first + texts.join(''));
    },
    async end() {
      if (!output.forPeople) await output.write(`${separator === '' ? start : ''}\n]}\n`);
    },
  };
}

function explained(isoscape: Isoscape, { sites, places }: PredictedBatch): ExplainedSite[] {
  if (sites.length === 0) return [];
  const { stations } = isoscape;
  const indexOf = new Map(stations.id.map((id, i) => [id, i]));
  return explainPlaces(isoscape, places).map((explanation, k) => {
    const { label, lonDeg, latDeg } = sites[k];
    return {
      site: label,
      lon: lonDeg,
      lat: latDeg,
      elevation_m: places.elevationM[k],
      ...covariatesOf(isoscape, places, k),
      parts: partsOf(explanation),
      stations: explanation.heaviest.map(({ stationId, weights }) => {
        const i = indexOf.get(stationId) ?? 0;
        const distanceKm = greatCircleKm(lonDeg, latDeg, stations.lonDeg[i], stations.latDeg[i]);
        return { id: stationId, distance_km: Number(distanceKm.toFixed(3)), weight: shortened(weights) };
      }),
    };
  });
}

/** The covariates of one place by name; nothing where the isoscape has none. */
export function covariatesOf(
  { covariates }: Isoscape,
  places: Places,
  index: number,
): { covariates?: Record<string, number> } {
  if (covariates.length === 0) return {};
  return {
    covariates: Object.fromEntries(covariates.map(({ name }, c) => [name, places.covariates[c][index]])),
  };
}

function partsOf({ d18O, d2H }: Explanation): Record<string, Part> {
  const parts: Record<string, Part> = {};
  if (d18O !== null) parts.d18O = d18O;
  if (d2H !== null) parts.d2H = d2H;
  if (d18O !== null && d2H !== null) {
    parts.dexcess = { trend: dExcess(d18O.trend, d2H.trend), residual: dExcess(d18O.residual, d2H.residual) };
  }
  const round = (value: number) => Number(value.toFixed(6));
  return Object.fromEntries(
    Object.entries(parts).map(([name, { trend, residual }]) => [
      name,
      { trend: round(trend), residual: round(residual) },
    ]),
  );
}

function shortened(weights: Readonly<Record<string, number>>): Record<string, number> {
  return Object.fromEntries(
    Object.entries(weights).map(([name, value]) => [name, Number(value.toPrecision(6))]),
  );
}

function siteText(site: ExplainedSite): string {
  const parts = Object.entries(site.parts).map(([name, { trend, residual }]) => [
    name,
    decimals(trend, 3),
    decimals(residual, 3),
  ]);
  const fields = Object.keys(site.stations[0]?.weight ?? {});
  const weights = site.stations.map(({ id, distance_km, weight }) => [
    id,
    decimals(distance_km, 1),
    ...fields.map((field) => decimals(weight[field], 4)),
  ]);
  return (
    `${site.site} (${site.lon}, ${site.lat}, ${decimals(site.elevation_m, 0)} m)\n` +
    textTable(['‰', 'trend', 'residual'], parts, { indent: 2 }) +
    textTable(['station', 'km', ...fields.map((field) => `weight ${field}`)], weights, { indent: 2 })
  );
}
