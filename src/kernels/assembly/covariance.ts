// Covariances of a block of places, and correlations of given distances, two at a time.

import { exponential } from './exponential';

const SQRT3: f64 = 1.7320508075688772;
const SQRT5: f64 = 2.23606797749979;

// Families by number, in the order of COVARIANCE_KINDS; their scales put √3 and √5 into the distance.
const EXPONENTIAL = 0;
const MATERN32 = 1;
const MATERN52 = 2;

/** What a distance is multiplied by, so that `correlationAt` takes the family's own argument. */
function scaleOf(kind: i32, rangeKm: f64): f64 {
  if (kind == MATERN32) return SQRT3 / rangeKm;
  if (kind == MATERN52) return SQRT5 / rangeKm;
  return 1 / rangeKm;
}

/** ρ at u = distance times the family's scale. */
// @ts-ignore: decorator
@inline
function correlationAt(kind: i32, u: v128): v128 {
  const one = f64x2.splat(1);
  if (kind == EXPONENTIAL) return exponential(f64x2.neg(u));
  if (kind == MATERN32) return f64x2.mul(f64x2.add(one, u), exponential(f64x2.neg(u)));
  if (kind == MATERN52) {
    const third = f64x2.div(f64x2.mul(u, u), f64x2.splat(3));
    return f64x2.mul(f64x2.add(f64x2.add(one, u), third), exponential(f64x2.neg(u)));
  }
  // Spherical: 1 − 1.5u + 0.5u³ below u = 1, else 0.
  const cubic = f64x2.mul(f64x2.mul(f64x2.splat(0.5), u), f64x2.mul(u, u));
  const inside = f64x2.add(f64x2.sub(one, f64x2.mul(f64x2.splat(1.5), u)), cubic);
  return v128.and(inside, f64x2.lt(u, one));
}

/** ∂ρ/∂(ln range) at the same u. */
// @ts-ignore: decorator
@inline
function slopeAt(kind: i32, u: v128): v128 {
  const one = f64x2.splat(1);
  const square = f64x2.mul(u, u);
  if (kind == EXPONENTIAL) return f64x2.mul(u, exponential(f64x2.neg(u)));
  if (kind == MATERN32) return f64x2.mul(square, exponential(f64x2.neg(u)));
  if (kind == MATERN52) {
    const factor = f64x2.mul(f64x2.div(square, f64x2.splat(3)), f64x2.add(one, u));
    return f64x2.mul(factor, exponential(f64x2.neg(u)));
  }
  const inside = f64x2.mul(f64x2.mul(f64x2.splat(1.5), u), f64x2.sub(one, square));
  return v128.and(inside, f64x2.lt(u, one));
}

/**
 * out (n × count) = sill·ρ of the distances of n stations to `count` places.
 *
 * @param stations  n × 3, row-major
 * @param places    three rows (x, y, z) of `stride` bytes; one number beyond an odd count is read
 * @param out       row-major
 */
export function covariance(
  kind: i32, sill: f64, rangeKm: f64, stations: usize, n: i32, places: usize, stride: usize, count: i32,
  out: usize,
): void {
  const scale = f64x2.splat(scaleOf(kind, rangeKm));
  const height = f64x2.splat(sill);
  for (let i = 0; i < n; i++) {
    const x = v128.load_splat<f64>(stations);
    const y = v128.load_splat<f64>(stations, 8);
    const z = v128.load_splat<f64>(stations, 16);
    stations += 24;
    let place = places;
    for (let j = 0; j < count; j += 2) {
      const dx = f64x2.sub(x, v128.load(place));
      const dy = f64x2.sub(y, v128.load(place + stride));
      const dz = f64x2.sub(z, v128.load(place + 2 * stride));
      const squares = f64x2.add(f64x2.add(f64x2.mul(dx, dx), f64x2.mul(dy, dy)), f64x2.mul(dz, dz));
      const u = f64x2.mul(f64x2.sqrt(squares), scale);
      const value = f64x2.mul(height, correlationAt(kind, u));
      if (j + 1 < count) v128.store(out, value);
      else store<f64>(out, f64x2.extract_lane(value, 0));
      place += 16;
      out += j + 1 < count ? 16 : 8;
    }
  }
}

/**
 * Correlations of `count` distances, or their slopes in the logarithm of the range, in place; an odd last one with its
 * neighbour.
 */
export function correlations(kind: i32, rangeKm: f64, distances: usize, count: i32, slopes: bool): void {
  const scale = f64x2.splat(scaleOf(kind, rangeKm));
  for (let i = 0; i < count; i += 2) {
    const u = f64x2.mul(v128.load(distances), scale);
    v128.store(distances, slopes ? slopeAt(kind, u) : correlationAt(kind, u));
    distances += 16;
  }
}

/** e^x of `count` numbers x ≤ 0 in place, an odd last one with its neighbour (for tests of `exponential`). */
export function exponentials(x: usize, count: i32): void {
  for (let i = 0; i < count; i += 2) {
    v128.store(x, exponential(v128.load(x)));
    x += 16;
  }
}
