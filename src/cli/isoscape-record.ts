import { basename } from 'node:path';
import type { Isoscape } from '../isoscape/index.js';

/** The isoscape of a run, for its record. */
export function isoscapeRecord(isoscape: Isoscape, path: string, sha256: string) {
  return {
    id: isoscape.id,
    file: basename(path),
    sha256,
    network: isoscape.networkName,
    season: isoscape.season.label,
    isotopes: isoscape.isotopes,
    algorithm_version: isoscape.algorithmVersion,
  };
}
