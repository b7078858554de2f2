// Register tiles: 4 × 4 blocks of a product, eight f64x2 sums that share every loaded number. Sixteen vector
// registers hold the sums, two of B and one of A; larger tiles would spill. There is no fused multiply-add in
// WebAssembly SIMD (the relaxed one rounds differently from processor to processor).

/** Bytes of a 4 × 4 tile. */
export const TILE_BYTES: usize = 128;

/**
 * out (4 × 4) = Σ_k A[r][k]·B[k][c] of four rows of A, each with its numbers side by side, and a packed panel of B.
 *
 * @param a0, a1, a2, a3  the rows, at the first k; rows may coincide
 * @param b               panel: four numbers a k
 */
export function rowTile(
  a0: usize, a1: usize, a2: usize, a3: usize, b: usize, count: i32, out: usize,
): void {
  let s00 = f64x2.splat(0), s01 = s00, s10 = s00, s11 = s00;
  let s20 = s00, s21 = s00, s30 = s00, s31 = s00;
  for (let k = count >> 1; k > 0; k--) {
    let b0 = v128.load(b);
    let b1 = v128.load(b, 16);
    let a = v128.load_splat<f64>(a0);
    s00 = f64x2.add(s00, f64x2.mul(a, b0));
    s01 = f64x2.add(s01, f64x2.mul(a, b1));
    a = v128.load_splat<f64>(a1);
    s10 = f64x2.add(s10, f64x2.mul(a, b0));
    s11 = f64x2.add(s11, f64x2.mul(a, b1));
    a = v128.load_splat<f64>(a2);
    s20 = f64x2.add(s20, f64x2.mul(a, b0));
    s21 = f64x2.add(s21, f64x2.mul(a, b1));
    a = v128.load_splat<f64>(a3);
    s30 = f64x2.add(s30, f64x2.mul(a, b0));
    s31 = f64x2.add(s31, f64x2.mul(a, b1));
    b0 = v128.load(b, 32);
    b1 = v128.load(b, 48);
    a = v128.load_splat<f64>(a0, 8);
    s00 = f64x2.add(s00, f64x2.mul(a, b0));
    s01 = f64x2.add(s01, f64x2.mul(a, b1));
    a = v128.load_splat<f64>(a1, 8);
    s10 = f64x2.add(s10, f64x2.mul(a, b0));
    s11 = f64x2.add(s11, f64x2.mul(a, b1));
    a = v128.load_splat<f64>(a2, 8);
    s20 = f64x2.add(s20, f64x2.mul(a, b0));
    s21 = f64x2.add(s21, f64x2.mul(a, b1));
    a = v128.load_splat<f64>(a3, 8);
    s30 = f64x2.add(s30, f64x2.mul(a, b0));
    s31 = f64x2.add(s31, f64x2.mul(a, b1));
    a0 += 16;
    a1 += 16;
    a2 += 16;
    a3 += 16;
    b += 64;
  }
  if (count & 1) {
    const b0 = v128.load(b);
    const b1 = v128.load(b, 16);
    let a = v128.load_splat<f64>(a0);
    s00 = f64x2.add(s00, f64x2.mul(a, b0));
    s01 = f64x2.add(s01, f64x2.mul(a, b1));
    a = v128.load_splat<f64>(a1);
    s10 = f64x2.add(s10, f64x2.mul(a, b0));
    s11 = f64x2.add(s11, f64x2.mul(a, b1));
    a = v128.load_splat<f64>(a2);
    s20 = f64x2.add(s20, f64x2.mul(a, b0));
    s21 = f64x2.add(s21, f64x2.mul(a, b1));
    a = v128.load_splat<f64>(a3);
    s30 = f64x2.add(s30, f64x2.mul(a, b0));
    s31 = f64x2.add(s31, f64x2.mul(a, b1));
  }
  v128.store(out, s00);
  v128.store(out, s01, 16);
  v128.store(out, s10, 32);
  v128.store(out, s11, 48);
  v128.store(out, s20, 64);
  v128.store(out, s21, 80);
  v128.store(out, s30, 96);
  v128.store(out, s31, 112);
}

/** out (4 × 4) = Σ_k A[k][r]·B[k][c] of two packed panels, four numbers a k in both. */
export function panelTile(a: usize, b: usize, count: i32, out: usize): void {
  let s00 = f64x2.splat(0), s01 = s00, s10 = s00, s11 = s00;
  let s20 = s00, s21 = s00, s30 = s00, s31 = s00;
  for (let k = count >> 1; k > 0; k--) {
    let b0 = v128.load(b);
    let b1 = v128.load(b, 16);
    let x = v128.load_splat<f64>(a);
    s00 = f64x2.add(s00, f64x2.mul(x, b0));
    s01 = f64x2.add(s01, f64x2.mul(x, b1));
    x = v128.load_splat<f64>(a, 8);
    s10 = f64x2.add(s10, f64x2.mul(x, b0));
    s11 = f64x2.add(s11, f64x2.mul(x, b1));
    x = v128.load_splat<f64>(a, 16);
    s20 = f64x2.add(s20, f64x2.mul(x, b0));
    s21 = f64x2.add(s21, f64x2.mul(x, b1));
    x = v128.load_splat<f64>(a, 24);
    s30 = f64x2.add(s30, f64x2.mul(x, b0));
    s31 = f64x2.add(s31, f64x2.mul(x, b1));
    b0 = v128.load(b, 32);
    b1 = v128.load(b, 48);
    x = v128.load_splat<f64>(a, 32);
    s00 = f64x2.add(s00, f64x2.mul(x, b0));
    s01 = f64x2.add(s01, f64x2.mul(x, b1));
    x = v128.load_splat<f64>(a, 40);
    s10 = f64x2.add(s10, f64x2.mul(x, b0));
    s11 = f64x2.add(s11, f64x2.mul(x, b1));
    x = v128.load_splat<f64>(a, 48);
    s20 = f64x2.add(s20, f64x2.mul(x, b0));
    s21 = f64x2.add(s21, f64x2.mul(x, b1));
    x = v128.load_splat<f64>(a, 56);
    s30 = f64x2.add(s30, f64x2.mul(x, b0));
    s31 = f64x2.add(s31, f64x2.mul(x, b1));
    a += 64;
    b += 64;
  }
  if (count & 1) {
    const b0 = v128.load(b);
    const b1 = v128.load(b, 16);
    let x = v128.load_splat<f64>(a);
    s00 = f64x2.add(s00, f64x2.mul(x, b0));
    s01 = f64x2.add(s01, f64x2.mul(x, b1));
    x = v128.load_splat<f64>(a, 8);
    s10 = f64x2.add(s10, f64x2.mul(x, b0));
    s11 = f64x2.add(s11, f64x2.mul(x, b1));
    x = v128.load_splat<f64>(a, 16);
    s20 = f64x2.add(s20, f64x2.mul(x, b0));
    s21 = f64x2.add(s21, f64x2.mul(x, b1));
    x = v128.load_splat<f64>(a, 24);
    s30 = f64x2.add(s30, f64x2.mul(x, b0));
    s31 = f64x2.add(s31, f64x2.mul(x, b1));
  }
  v128.store(out, s00);
  v128.store(out, s01, 16);
  v128.store(out, s10, 32);
  v128.store(out, s11, 48);
  v128.store(out, s20, 64);
  v128.store(out, s21, 80);
  v128.store(out, s30, 96);
  v128.store(out, s31, 112);
}
