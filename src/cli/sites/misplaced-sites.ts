import type { Support } from '../../isoscape/index.js';
import type { CliContext } from '../context.js';
import type { Site, SiteRow } from './site-reader.js';

/** Sites named in a note. */
const SHOWN_SITES = 5;

type Slip = 'exchanged' | 'longitude-sign' | 'latitude-sign';

const SLIPS: readonly { readonly slip: Slip; readonly undone: (site: Site) => [lon: number, lat: number] }[] =
  [
    { slip: 'exchanged', undone: ({ lonDeg, latDeg }) => [latDeg, lonDeg] },
    { slip: 'longitude-sign', undone: ({ lonDeg, latDeg }) => [-lonDeg, latDeg] },
    { slip: 'latitude-sign', undone: ({ lonDeg, latDeg }) => [lonDeg, -latDeg] },
  ];

const WORDS: Readonly<Record<Slip, string>> = {
  exchanged: 'as if longitude and latitude were exchanged',
  'longitude-sign': 'as if the sign of the longitude were turned',
  'latitude-sign': 'as if the sign of the latitude were turned',
};

interface Found {
  count: number;
  nearestKm: number;
  readonly shown: string[];
}

/** Whether a place lies among the stations, or no farther from one than neighbouring stations are. */
export function isNearStations(support: Support, lonDeg: number, latDeg: number): boolean {
  const flags = support.flags(lonDeg, latDeg, Number.NaN, false);
  return !flags.includes('outside-hull') || !flags.includes('far-from-stations');
}

/**
 * Collects sites far from all stations that would lie inside the network's hull with their coordinates exchanged or
 * one sign turned. It proves nothing: they are predicted as given, and a note says so.
 */
export class MisplacedSites {
  readonly #support: Support;
  readonly #found = new Map<Slip, Found>();

  constructor(support: Support) {
    this.#support = support;
  }

  add(rows: readonly SiteRow[]): void {
    for (const { site, line } of rows) {
      if (site === null || isNearStations(this.#support, site.lonDeg, site.latDeg)) continue;
      const slip = SLIPS.find(({ undone }) => this.#isInside(...undone(site)))?.slip;
      if (slip !== undefined) this.#note(slip, site, line);
    }
  }

  report({ stderr }: CliContext): void {
    for (const [slip, { count, nearestKm, shown }] of this.#found) {
      const names = count > shown.length ? `${shown.join(', ')}, …` : shown.join(', ');
      const [sites, given] = count === 1 ? ['1 site looks', 'it is'] : [`${count} sites look`, 'they are'];
      const text = `${sites} ${WORDS[slip]} (${names}): as given ${given} ${Math.round(nearestKm)} km${count === 1 ? '' : ' or more'} from the nearest station`;
      stderr.write(`rainprint: note: ${text.replace(/[\r\n]+/g, ' ')}\n`);
    }
  }

  #isInside(lonDeg: number, latDeg: number): boolean {
    return (
      Math.abs(latDeg) <= 90 &&
      !this.#support.flags(lonDeg, latDeg, Number.NaN, false).includes('outside-hull')
    );
  }

  #note(slip: Slip, site: Site, line: number): void {
    const found = this.#found.get(slip) ?? { count: 0, nearestKm: Number.POSITIVE_INFINITY, shown: [] };
    found.count++;
    found.nearestKm = Math.min(found.nearestKm, this.#support.nearestStationKm(site.lonDeg, site.latDeg));
    const name = site.label === `line ${line}` ? '' : ` ${site.label}`;
    if (found.shown.length < SHOWN_SITES) found.shown.push(`line ${line}${name}`);
    this.#found.set(slip, found);
  }
}
