export interface Land {
  readonly width: number;
  readonly height: number;
  readonly isLandCell: Uint8Array;
  readonly elevationM: Float64Array;
  readonly coastKm: Float64Array;
  readonly shadow: Float64Array;
  isLand(lonDeg: number, latDeg: number): boolean;
  gridElevationM(lonDeg: number, latDeg: number): number;
  coastKmAt(lonDeg: number, latDeg: number): number;
  shadowAt(lonDeg: number, latDeg: number): number;
}

export const BOUNDS: {
  readonly westDeg: number;
  readonly southDeg: number;
  readonly eastDeg: number;
  readonly northDeg: number;
};
export const CELL_DEG: number;
export const SEA_NODATA: number;
export function toPlaneKm(lonDeg: number, latDeg: number): [xKm: number, yKm: number];
export function createLand(): Land;
