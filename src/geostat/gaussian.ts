/**
 * The standard Gaussian: density, distribution function and quantile, in double precision. Shared by
 * intervals (quantile), scores (distribution, density) and the report.
 */

const SQRT_HALF = Math.SQRT1_2;
const INVERSE_SQRT_PI = 0.5641895835477563;
const INVERSE_SQRT_TWO_PI = 0.3989422804014327;

/** φ(z) = exp(−z²/2)/√(2π). NaN for NaN. */
export function gaussianDensity(z: number): number {
  return INVERSE_SQRT_TWO_PI * Math.exp(-0.5 * z * z);
}

/**
 * Φ(z), the probability below z. Relative error a few units of rounding in both tails, since it is made from
 * erfc and never as 1 − something small. NaN for NaN.
 */
export function gaussianCdf(z: number): number {
  return 0.5 * complementaryError(-z * SQRT_HALF);
}

/**
 * erfc(x) by the three rational Chebyshev approximations of W. J. Cody (1969, Math. Comp. 23:631–637), with
 * exp(−x²) split in two factors as there, so that large |x| keep their relative accuracy.
 */
function complementaryError(x: number): number {
  const size = Math.abs(x); // beyond 27.3 the result is below the smallest double
  if (size <= 0.46875) return 1 - x * centralRatio(x * x);
  const tail = size > 28 ? 0 : expMinusSquare(size) * (size <= 4 ? middleRatio(size) : farRatio(size));
  return x < 0 ? 2 - tail : tail;
}

/** exp(−x²) with x² = s² + (x − s)(x + s), s being x cut to sixteenths: s² is exact. */
function expMinusSquare(x: number): number {
  const coarse = Math.trunc(x * 16) / 16;
  return Math.exp(-coarse * coarse) * Math.exp(-(x - coarse) * (x + coarse));
}

/** erf(x)/x for |x| ≤ 0.46875, argument x². */
function centralRatio(square: number): number {
  const above = [
    0.18577770618460315, 3.1611237438705655, 113.86415415105016, 377.485237685302, 3209.3775891384694,
  ];
  const below = [1, 23.601290952344122, 244.02463793444417, 1282.6165260773723, 2844.236833439171];
  return horner(above, square) / horner(below, square);
}

/** erfc(x)·exp(x²) for 0.46875 ≤ x ≤ 4. */
function middleRatio(x: number): number {
  const above = [
    2.1531153547440383e-8, 0.5641884969886701, 8.883149794388377, 66.11919063714163, 298.6351381974001,
    881.952221241769, 1712.0476126340707, 2051.0783778260716, 1230.3393547979972,
  ];
  const below = [
    1, 15.744926110709835, 117.6939508913125, 537.1811018620099, 1621.3895745666903, 3290.7992357334597,
    4362.619090143247, 3439.3676741437216, 1230.3393548037495,
  ];
  return horner(above, x) / horner(below, x);
}

/** erfc(x)·exp(x²) for x > 4, from an expansion in 1/x². */
function farRatio(x: number): number {
  const above = [
    0.016315387137302097, 0.30532663496123236, 0.36034489994980445, 0.12578172611122926, 0.016083785148742275,
    0.0006587491615298378,
  ];
  const below = [
    1, 2.568520192289822, 1.8729528499234673, 0.5279051029514285, 0.06051834131244132, 0.0023352049762686918,
  ];
  const inverseSquare = 1 / (x * x);
  const correction = (inverseSquare * horner(above, inverseSquare)) / horner(below, inverseSquare);
  return (INVERSE_SQRT_PI - correction) / x;
}

/**
 * z with Φ(z) = probability: algorithm AS 241, PPND16 (M. J. Wichura 1988, Appl. Statist. 37:477–484),
 * relative error about 1e-16. −Infinity at 0, Infinity at 1, NaN outside [0, 1].
 */
export function gaussianQuantile(probability: number): number {
  if (!(probability >= 0 && probability <= 1)) return Number.NaN;
  const centred = probability - 0.5;
  if (Math.abs(centred) <= 0.425) return centred * quantileCentre(0.180625 - centred * centred);
  const tail = centred < 0 ? probability : 1 - probability;
  if (tail === 0) return centred < 0 ? Number.NEGATIVE_INFINITY : Number.POSITIVE_INFINITY;
  const depth = Math.sqrt(-Math.log(tail));
  const size = depth <= 5 ? quantileShoulder(depth - 1.6) : quantileTail(depth - 5);
  return centred < 0 ? -size : size;
}

function quantileCentre(r: number): number {
  const above = [
    2509.0809287301227, 33430.57558358813, 67265.7709270087, 45921.95393154987, 13731.69376550946,
    1971.5909503065513, 133.14166789178438, 3.3871328727963665,
  ];
  const below = [
    5226.495278852854, 28729.085735721943, 39307.89580009271, 21213.794301586597, 5394.196021424751,
    687.1870074920579, 42.31333070160091, 1,
  ];
  return horner(above, r) / horner(below, r);
}

function quantileShoulder(r: number): number {
  const above = [
    0.0007745450142783414, 0.022723844989269184, 0.2417807251774506, 1.2704582524523684, 3.6478483247632045,
    5.769497221460691, 4.630337846156546, 1.4234371107496835,
  ];
  const below = [
    1.0507500716444169e-9, 0.0005475938084995345, 0.015198666563616457, 0.14810397642748008, 0.6897673349851,
    1.6763848301838038, 2.053191626637759, 1,
  ];
  return horner(above, r) / horner(below, r);
}

function quantileTail(r: number): number {
  const above = [
    2.0103343992922881e-7, 2.7115555687434876e-5, 0.0012426609473880784, 0.026532189526576124,
    0.29656057182850487, 1.7848265399172913, 5.463784911164114, 6.657904643501103,
  ];
  const below = [
    2.0442631033899397e-15, 1.421511758316446e-7, 1.8463183175100548e-5, 0.0007868691311456133,
    0.014875361290850615, 0.1369298809227358, 0.599832206555888, 1,
  ];
  return horner(above, r) / horner(below, r);
}

/** Polynomial by Horner's rule, highest power first. */
function horner(coefficients: readonly number[], x: number): number {
  let sum = 0;
  for (const coefficient of coefficients) sum = sum * x + coefficient;
  return sum;
}
