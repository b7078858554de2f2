// e^x for x ≤ 0, two at a time.

const LOG2_E: f64 = 1.4426950408889634;
// ln 2 in two parts: k·LN2_HIGH is exact for |k| < 2^20.
const LN2_HIGH: f64 = 6.93145751953125e-1;
const LN2_LOW: f64 = 1.42860682030941723212e-6;
/** Adding it leaves a whole number in the last bits of the significand. */
const ROUNDER: f64 = 6755399441055744; // 1.5·2^52
/** e^x is 0 below −745.14; the argument is held here, so that the powers of two below stay normal numbers. */
const LEAST: f64 = -750;

/**
 * e^x for x ≤ 0, NaN for NaN, 0 from about −745 down.
 *
 * x = k·ln 2 + r, |r| ≤ ln 2/2; e^r = 1 + 2rP(r²)/(Q(r²) − rP(r²)), rational approximation of Moshier 1989 (Methods
 * and Programs for Mathematical Functions, `exp`), then two factors 2^⌊k/2⌋ and 2^(k−⌊k/2⌋), so that results below
 * the smallest normal number come out rounded once.
 */
// @ts-ignore: decorator
@inline
export function exponential(x: v128): v128 {
  const held = f64x2.max(x, f64x2.splat(LEAST));
  const k = f64x2.nearest(f64x2.mul(held, f64x2.splat(LOG2_E)));
  let r = f64x2.sub(held, f64x2.mul(k, f64x2.splat(LN2_HIGH)));
  r = f64x2.sub(r, f64x2.mul(k, f64x2.splat(LN2_LOW)));
  const s = f64x2.mul(r, r);
  let p = f64x2.add(f64x2.mul(f64x2.splat(1.26177193074810590878e-4), s), f64x2.splat(3.02994407707441961300e-2));
  p = f64x2.mul(r, f64x2.add(f64x2.mul(p, s), f64x2.splat(9.99999999999999999910e-1)));
  let q = f64x2.add(f64x2.mul(f64x2.splat(3.00198505138664455042e-6), s), f64x2.splat(2.52448340349684104192e-3));
  q = f64x2.add(f64x2.mul(q, s), f64x2.splat(2.27265548208155028766e-1));
  q = f64x2.add(f64x2.mul(q, s), f64x2.splat(2));
  const e = f64x2.div(p, f64x2.sub(q, p));
  const half = f64x2.floor(f64x2.mul(k, f64x2.splat(0.5)));
  const mantissa = f64x2.add(f64x2.splat(1), f64x2.add(e, e));
  return f64x2.mul(f64x2.mul(mantissa, powerOfTwo(half)), powerOfTwo(f64x2.sub(k, half)));
}

/** 2^k of whole numbers −1022 ≤ k ≤ 1023. */
// @ts-ignore: decorator
@inline
function powerOfTwo(k: v128): v128 {
  return i64x2.shl(f64x2.add(k, f64x2.splat(ROUNDER + 1023)), 52);
}
