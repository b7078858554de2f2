import { INVENTED } from './elevation-file.mjs';
import { ISLAND_NAMES, LAND_NAME, PLATEAU_NAME, RANGE_NAMES, RIVER_NAMES } from './names.mjs';

/** The README of the output folder: what each file is, and that all of it is invented. */
export function outReadme(seed, comparison) {
  return `# Output of \`npm run demo\` (seed ${seed})

**${INVENTED}** Land, names, stations, records, sites and truth are drawn by \`scripts/demo/\`; do not use any of it as data.

${LAND_NAME} is put in an empty stretch of the South Pacific. Westerly winds meet ${RANGE_NAMES.west} first; in its shadow
lies ${PLATEAU_NAME}, with ${RANGE_NAMES.north} north and ${RANGE_NAMES.east} east of it. Off the coast: ${Object.values(ISLAND_NAMES).join(', ')}.
The sites stand along ${RIVER_NAMES.length} rivers, from ${RIVER_NAMES[0]} to ${RIVER_NAMES.at(-1)}.

| file | what it is |
| --- | --- |
| invented-records.csv | monthly records of the invented stations, three planted mistakes included |
| invented-sites.csv | sixty invented field sites; six lack an elevation |
| invented-elevation.tif | elevation of ${LAND_NAME}, EPSG:4326, 0.05°, metres |
| invented-areas.geojson | two invented basins |
| invented-layer.tif | a layer somebody might have: distance to the coast, UTM zone 10 south, 10 km |
| invented-truth.csv | the expected long-term amount-weighted means at the sites, which nobody would know of a real land |
| check.json | what \`rainprint check\` found |
| isoscape.json | the fitted isoscape |
| validation.html | report of \`rainprint validate\` |
| sites.csv | predictions at the sites (beside it what would re-run them) |
| grid.tif | predictions over the land, seven bands; beside it a STAC item, colours for each band and what would re-run it |
| areas.csv | means over the two basins |
| comparison.json | the table below |

The truth is not of the model's kind: its elevation effect bends at 1500 m and turns round in the rain shadow, its axes
in the dual-isotope plane drift from west to east, its fields are not stationary, its tails are heavier than Gaussian.

${comparison}
`;
}
