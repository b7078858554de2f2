/**
 * Seeded random numbers for the invented world: the same seed gives the same world on every machine that runs
 * V8, whose Math functions are software ports of fdlibm.
 */

/**
 * Uniform 32-bit stream: xoshiro128** 1.1 (Blackman & Vigna 2021, ACM Trans. Math. Softw. 47(4):36), state set
 * by the finaliser of MurmurHash3 (Appleby 2011, public domain) over a Weyl sequence. `part` keeps the streams
 * of different parts of the world apart, so that a change in one does not move the others.
 */
export function createRandom(seed, part) {
  let weyl = (hashText(part) ^ Math.imul(seed | 0, 0x9e3779b1)) >>> 0;
  const nextState = () => {
    weyl = (weyl + 0x9e3779b9) >>> 0;
    return finalise(weyl);
  };
  const s = Uint32Array.from([nextState(), nextState(), nextState(), nextState()]);
  const next32 = () => {
    const result = Math.imul(rotateLeft(Math.imul(s[1], 5), 7), 9) >>> 0;
    const shifted = s[1] << 9;
    s[2] ^= s[0];
    s[3] ^= s[1];
    s[1] ^= s[2];
    s[0] ^= s[3];
    s[2] ^= shifted;
    s[3] = rotateLeft(s[3], 11);
    return result;
  };
  return distributions(next32);
}

function distributions(next32) {
  /** Uniform in (0, 1): never 0, so that its logarithm is finite. */
  const uniform = () => (next32() + 0.5) / 4294967296;
  const between = (low, high) => low + (high - low) * uniform();
  const integerBelow = (count) => Math.floor(uniform() * count);
  const chance = (probability) => uniform() < probability;
  /** Box & Muller 1958, Ann. Math. Stat. 29:610; the second value is thrown away to keep the stream simple. */
  const normal = () => Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform());

  /** Gamma(shape), mean = shape. Marsaglia & Tsang 2000, ACM Trans. Math. Softw. 26:363; shape >= 1. */
  const gamma = (shape) => {
    const d = shape - 1 / 3;
    const c = 1 / Math.sqrt(9 * d);
    for (;;) {
      const x = normal();
      const v = (1 + c * x) ** 3;
      if (v > 0 && Math.log(uniform()) < 0.5 * x * x + d - d * v + d * Math.log(v)) return d * v;
    }
  };

  /**
   * Student's t with 5 degrees of freedom, scaled to unit variance (Var t = 5/3). Beyond 6 it is drawn again: rain
   * has its physical limits, and the mean stays 0 since both tails are cut alike.
   */
  const heavyTailed = () => {
    for (;;) {
      const t = normal() / Math.sqrt((2 * gamma(5 / 2)) / 5) / Math.sqrt(5 / 3);
      if (Math.abs(t) < 6) return t;
    }
  };
  const pick = (list) => list[integerBelow(list.length)];
  return { uniform, between, integerBelow, chance, normal, gamma, heavyTailed, pick };
}

function rotateLeft(x, k) {
  return ((x << k) | (x >>> (32 - k))) >>> 0;
}

function finalise(x) {
  let h = Math.imul(x ^ (x >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return (h ^ (h >>> 16)) >>> 0;
}

/** FNV-1a (Fowler, Noll & Vo), 32 bits. */
function hashText(text) {
  let h = 0x811c9dc5;
  for (let i = 0; i < text.length; i++) h = Math.imul(h ^ text.charCodeAt(i), 0x01000193) >>> 0;
  return h;
}

/** Value of a lattice point in (-1, 1) from its indices alone: the source of the relief's noise. */
export function latticeValue(seed, column, row) {
  const mixed = finalise(
    (Math.imul(column, 0x27d4eb2d) ^ finalise((Math.imul(row, 0x165667b1) + seed) >>> 0)) >>> 0,
  );
  return (mixed + 0.5) / 2147483648 - 1;
}
