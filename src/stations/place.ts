/** Mean Earth radius of the model, m. */
const EARTH_RADIUS_M = 6_371_008.8;
const RADIANS = Math.PI / 180;

/** Position on the sphere, m from its centre: longitudes join at ±180° and at the poles by themselves. */
export type Position = readonly [x: number, y: number, z: number];

export function positionM(lonDeg: number, latDeg: number): Position {
  const ring = EARTH_RADIUS_M * Math.cos(latDeg * RADIANS);
  return [
    ring * Math.cos(lonDeg * RADIANS),
    ring * Math.sin(lonDeg * RADIANS),
    EARTH_RADIUS_M * Math.sin(latDeg * RADIANS),
  ];
}

/** Straight distance, m: at 100 m it differs from the one along the ground by less than a micrometre. */
export function chordM(a: Position, b: Position): number {
  return Math.hypot(a[0] - b[0], a[1] - b[1], a[2] - b[2]);
}

/** Finds earlier places within a distance in constant time: a hash of cubes with that edge. */
export class NearbyPlaces<T> {
  readonly #cubes = new Map<string, { position: Position; item: T }[]>();
  constructor(private readonly withinM: number) {}

  /** The first item added within the distance of `position`, or null. */
  find(position: Position): T | null {
    const [i, j, k] = this.#cube(position);
    for (let di = -1; di <= 1; di++) {
      for (let dj = -1; dj <= 1; dj++) {
        for (let dk = -1; dk <= 1; dk++) {
          const near = this.#cubes
            .get(`${i + di},${j + dj},${k + dk}`)
            ?.find((held) => chordM(held.position, position) <= this.withinM);
          if (near !== undefined) return near.item;
        }
      }
    }
    return null;
  }

  add(position: Position, item: T): void {
    const key = this.#cube(position).join(',');
    const held = this.#cubes.get(key);
    if (held === undefined) this.#cubes.set(key, [{ position, item }]);
    else held.push({ position, item });
  }

  #cube(position: Position): [number, number, number] {
    return position.map((value) => Math.floor(value / this.withinM)) as [number, number, number];
  }
}
