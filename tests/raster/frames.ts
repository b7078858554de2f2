import { type CellWindow, epsgCrs, type GridFrame } from '../../src/raster/index.js';

/** A frame of square cells. */
export function frameOf(
  epsg: number,
  originX: number,
  originY: number,
  cell: number,
  width: number,
  height: number,
): GridFrame {
  const { definition, kind, name } = epsgCrs(epsg);
  return {
    width,
    height,
    crs: { epsg, definition, kind, name },
    originX,
    originY,
    cellWidth: cell,
    cellHeight: cell,
  };
}

export const whole = ({ width, height }: GridFrame): CellWindow => ({
  firstColumn: 0,
  firstRow: 0,
  width,
  height,
});

/** Frames of every sort, each where its CRS is at home. */
export const FRAMES: readonly (readonly [string, GridFrame])[] = [
  ['longitude and latitude', frameOf(4326, -25, 71, 0.25, 200, 140)],
  ['longitude and latitude over the antimeridian', frameOf(4326, 160, 20, 0.5, 90, 80)],
  ['the whole Earth', frameOf(4326, -180, 90, 2.5, 144, 72)],
  ['UTM 32 north', frameOf(32632, 200_000, 6_100_000, 5000, 130, 160)],
  ['UTM 60 south', frameOf(32760, 200_000, 8_100_000, 4000, 150, 120)],
  ['UTM 33 on ETRS89', frameOf(25833, 250_000, 5_900_000, 2500, 120, 100)],
  ['the European equal-area grid', frameOf(3035, 2_500_000, 5_400_000, 25_000, 140, 150)],
  ['Web Mercator', frameOf(3857, -20_037_508.342789244, 20_037_508.342789244, 200_000, 200, 200)],
  ['Antarctic stereographic', frameOf(3031, -3_000_000, 3_000_000, 50_000, 120, 120)],
  ['Arctic stereographic', frameOf(3413, -2_500_000, 2_500_000, 40_000, 125, 125)],
  ['universal polar stereographic', frameOf(32661, 500_000, 3_500_000, 25_000, 120, 120)],
  ['feet', frameOf(2263, 900_000, 300_000, 5000, 60, 60)],
  ['a datum with a shift', frameOf(27700, 0, 1_200_000, 10_000, 70, 120)],
];
