import { BOUNDS, toPlaneKm } from './land.mjs';
import { createNamer, ISLAND_NAMES, RIVER_NAMES } from './names.mjs';
import { createRandom } from './random.mjs';
import { ISLANDS } from './relief.mjs';
import { drawLocal } from './truth.mjs';
import { roundTo } from './weather.mjs';

/** Where the stations and the field sites stand: people live low and by the sea, plots go higher. */

export const STATION_COUNT = 140;
const STATIONS_AN_ISLAND = 3;
const STATION_SPACING_KM = 14;
const PLOTS_A_RIVER = 5;
const PLOT_SPACING_KM = 5;
const MOUTH_SPACING_KM = 120;
const CATCHMENT_KM = 220;
/** Sites whose elevation the field book lacks: every tenth. */
const SITE_WITHOUT_ELEVATION = 10;

export function placeStations(seed, land) {
  const random = createRandom(seed, 'stations');
  const nameIn = createNamer(random);
  const stations = [];
  const add = (place, island) => {
    const name = nameIn(island === null ? settingOf(place, land) : 'island');
    const number = String(stations.length + 1).padStart(3, '0');
    stations.push({ id: `OV${number}`, name: island === null ? name : `${name} (${island})`, ...place });
  };
  for (const [key, { xKm, yKm, radiusKm }] of Object.entries(ISLANDS)) {
    for (let k = 0; k < STATIONS_AN_ISLAND; k++) {
      const near = (place) => distanceKm(place, { xKm, yKm }) < 1.3 * radiusKm;
      add(
        drawPlace(random, land, stations, (place) => near(place) && isLowland(random, place, 1400)),
        ISLAND_NAMES[key],
      );
    }
  }
  while (stations.length < STATION_COUNT) {
    add(
      drawPlace(random, land, stations, (place) => isLowland(random, place, 1400)),
      null,
    );
  }
  return stations;
}

/** Sixty plots along twelve rivers, numbered upwards from each mouth. */
export function placeSites(seed, land) {
  const random = createRandom(seed, 'sites');
  const mouths = [];
  while (mouths.length < RIVER_NAMES.length) {
    const byTheSea = (place) => land.coastKmAt(place.lonDeg, place.latDeg) < 12;
    mouths.push(drawPlace(random, land, mouths, byTheSea, MOUTH_SPACING_KM));
  }
  const sites = [];
  mouths.forEach((mouth, river) => {
    const plots = [];
    while (plots.length < PLOTS_A_RIVER) {
      const wanted = (place) => distanceKm(place, mouth) < CATCHMENT_KM && isLowland(random, place, 3500);
      plots.push(drawPlace(random, land, [...sites, ...plots], wanted, PLOT_SPACING_KM));
    }
    sites.push(...nameSites(plots, river));
  });
  return sites;
}

function nameSites(list, river) {
  const upwards = [...list].sort((a, b) => a.elevationM - b.elevationM);
  return upwards.map((place, k) => {
    const number = river * PLOTS_A_RIVER + k;
    return {
      id: `P${String(number + 1).padStart(2, '0')}`,
      name: `${RIVER_NAMES[river]}, plot ${k + 1}`,
      elevationKnown: number % SITE_WITHOUT_ELEVATION !== 3,
      ...place,
    };
  });
}

/** A random place on land, apart from the others, that `wanted` accepts. */
function drawPlace(random, land, others, wanted, spacingKm = STATION_SPACING_KM) {
  for (;;) {
    const lonDeg = roundTo(random.between(BOUNDS.westDeg, BOUNDS.eastDeg), 4);
    const latDeg = roundTo(random.between(BOUNDS.southDeg, BOUNDS.northDeg), 4);
    if (!land.isLand(lonDeg, latDeg)) continue;
    const [xKm, yKm] = toPlaneKm(lonDeg, latDeg);
    const gridM = land.gridElevationM(lonDeg, latDeg);
    // A place is not its raster cell: valleys and knolls the raster does not show.
    const elevationM = Math.max(1, Math.round(gridM + (8 + 0.07 * gridM) * random.normal()));
    const place = { lonDeg, latDeg, elevationM, xKm, yKm };
    if (others.some((other) => distanceKm(place, other) < spacingKm) || !wanted(place)) continue;
    return { ...place, ...drawLocal(random) };
  }
}

/** True with a chance that falls by e each `scaleM` of height. */
function isLowland(random, place, scaleM) {
  return random.chance(Math.exp(-place.elevationM / scaleM));
}

function distanceKm(a, b) {
  return Math.hypot(a.xKm - b.xKm, a.yKm - b.yKm);
}

function settingOf(place, land) {
  if (land.coastKmAt(place.lonDeg, place.latDeg) < 20) return 'shore';
  if (place.elevationM > 900) return 'upland';
  return land.shadowAt(place.lonDeg, place.latDeg) > 0.3 ? 'valley' : 'plain';
}
