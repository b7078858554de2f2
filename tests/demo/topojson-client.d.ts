// The package brings no types; only what the tests use of it.
declare module 'topojson-client' {
  import type { FeatureCollection } from 'geojson';
  export function feature(topology: unknown, object: unknown): FeatureCollection;
}
