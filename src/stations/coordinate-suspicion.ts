import type { IssueLog } from './issue-log.js';
import type { StationMean } from './network.js';

/** Fewer stations than this give no picture of where the network lies. */
const FEWEST_STATIONS = 10;

/** The middle 80 % of the stations' longitudes and latitudes, °. */
interface Core {
  readonly west: number;
  readonly east: number;
  readonly south: number;
  readonly north: number;
}

/**
 * Flags stations that lie far from all others and would lie among them if longitude and latitude were exchanged, or
 * the sign of one were changed. It proves nothing, so the stations stay.
 *
 * "Far" is outside the core by more than its own width or height plus 5° (common practice, no source). A network across
 * ±180° has a core as wide as the Earth and raises no suspicion.
 */
export function flagSuspiciousCoordinates(
  stations: readonly StationMean[],
  columns: { readonly lon: string; readonly lat: string },
  log: IssueLog,
): void {
  if (stations.length < FEWEST_STATIONS) return;
  const core = coreOf(stations);
  for (const station of stations) {
    if (!isFar(core, station.lonDeg, station.latDeg)) continue;
    const { lonDeg, latDeg } = station;
    const guesses = [
      { lonDeg: latDeg, latDeg: lonDeg, reason: 'coordinates-perhaps-swapped', what: 'exchanged' },
      {
        lonDeg: -lonDeg,
        latDeg,
        reason: 'coordinates-perhaps-sign',
        what: 'with the longitude of the other sign',
      },
      {
        lonDeg,
        latDeg: -latDeg,
        reason: 'coordinates-perhaps-sign',
        what: 'with the latitude of the other sign',
      },
    ] as const;
    const guess = guesses.find((g) => isWithin(core, g.lonDeg, g.latDeg));
    if (guess === undefined) continue;
    const message = `longitude ${lonDeg}, latitude ${latDeg} is far from the other stations; ${guess.what} it lies among them`;
    log.add(
      guess.reason,
      {
        line: station.line,
        column: columns.lon,
        value: `${lonDeg}, ${latDeg}`,
        stationId: station.id,
        of: 'station',
      },
      message,
    );
  }
}

function coreOf(stations: readonly StationMean[]): Core {
  const lon = stations.map((s) => s.lonDeg).sort((a, b) => a - b);
  const lat = stations.map((s) => s.latDeg).sort((a, b) => a - b);
  const low = Math.floor(stations.length * 0.1);
  const high = stations.length - 1 - low;
  return { west: lon[low], east: lon[high], south: lat[low], north: lat[high] };
}

function isFar(core: Core, lonDeg: number, latDeg: number): boolean {
  const marginLon = core.east - core.west + 5;
  const marginLat = core.north - core.south + 5;
  return (
    lonDeg < core.west - marginLon ||
    lonDeg > core.east + marginLon ||
    latDeg < core.south - marginLat ||
    latDeg > core.north + marginLat
  );
}

function isWithin(core: Core, lonDeg: number, latDeg: number): boolean {
  const marginLon = (core.east - core.west) / 4 + 1;
  const marginLat = (core.north - core.south) / 4 + 1;
  return (
    lonDeg >= core.west - marginLon &&
    lonDeg <= core.east + marginLon &&
    latDeg >= core.south - marginLat &&
    latDeg <= core.north + marginLat
  );
}
