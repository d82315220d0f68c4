/**
 * Transforms and spectral products in double precision, two values at a time. AssemblyScript, compiled by scripts/build-wasm.mjs into
 * ../kernel.generated.ts. All memory is laid out by ../kernel.ts; nothing is allocated here.
 *
 * A transform has a power of two as its length, keeps real and imaginary parts in two arrays, works in place, and leaves its values in
 * the order in which the stages put them. The inverse takes them in that same order, and what happens in between happens value by value,
 * so nothing is ever sorted.
 *
 * Every stage of four (decimation in frequency) finds its factors w^j, w^2j, w^3j, j = 0 … length/4 − 1, one behind the other: for two
 * values of j at a time cos w^j, −sin w^j, cos w^2j, … as six pairs.
 */

/** Bytes of factors for two values of j. */
const FACTORS: usize = 96;

/** Stage of four over sub-transforms of `length` values, forward. */
// @ts-ignore: decorator
@inline
function splitStage(re: usize, im: usize, bytes: usize, length: usize, factors: usize): void {
  const quarter = length << 1;
  const half = length << 2;
  for (let base: usize = 0; base < bytes; base += length << 3) {
    let f = factors;
    const end = re + base + quarter;
    let i = im + base;
    for (let r = re + base; r < end; r += 16) {
      const ar = v128.load(r);
      const ai = v128.load(i);
      const br = v128.load(r + quarter);
      const bi = v128.load(i + quarter);
      const cr = v128.load(r + half);
      const ci = v128.load(i + half);
      const dr = v128.load(r + half + quarter);
      const di = v128.load(i + half + quarter);
      const sumACr = f64x2.add(ar, cr);
      const sumACi = f64x2.add(ai, ci);
      const difACr = f64x2.sub(ar, cr);
      const difACi = f64x2.sub(ai, ci);
      const sumBDr = f64x2.add(br, dr);
      const sumBDi = f64x2.add(bi, di);
      const difBDr = f64x2.sub(br, dr);
      const difBDi = f64x2.sub(bi, di);
      v128.store(r, f64x2.add(sumACr, sumBDr));
      v128.store(i, f64x2.add(sumACi, sumBDi));
      const e1r = f64x2.add(difACr, difBDi);
      const e1i = f64x2.sub(difACi, difBDr);
      const w1r = v128.load(f);
      const w1i = v128.load(f, 16);
      v128.store(r + quarter, f64x2.sub(f64x2.mul(e1r, w1r), f64x2.mul(e1i, w1i)));
      v128.store(i + quarter, f64x2.add(f64x2.mul(e1r, w1i), f64x2.mul(e1i, w1r)));
      const e2r = f64x2.sub(sumACr, sumBDr);
      const e2i = f64x2.sub(sumACi, sumBDi);
      const w2r = v128.load(f, 32);
      const w2i = v128.load(f, 48);
      v128.store(r + half, f64x2.sub(f64x2.mul(e2r, w2r), f64x2.mul(e2i, w2i)));
      v128.store(i + half, f64x2.add(f64x2.mul(e2r, w2i), f64x2.mul(e2i, w2r)));
      const e3r = f64x2.sub(difACr, difBDi);
      const e3i = f64x2.add(difACi, difBDr);
      const w3r = v128.load(f, 64);
      const w3i = v128.load(f, 80);
      v128.store(r + half + quarter, f64x2.sub(f64x2.mul(e3r, w3r), f64x2.mul(e3i, w3i)));
      v128.store(i + half + quarter, f64x2.add(f64x2.mul(e3r, w3i), f64x2.mul(e3i, w3r)));
      f += FACTORS;
      i += 16;
    }
  }
}

/** Undoes `splitStage`, but for a factor of 4. */
// @ts-ignore: decorator
@inline
function joinStage(re: usize, im: usize, bytes: usize, length: usize, factors: usize): void {
  const quarter = length << 1;
  const half = length << 2;
  for (let base: usize = 0; base < bytes; base += length << 3) {
    let f = factors;
    const end = re + base + quarter;
    let i = im + base;
    for (let r = re + base; r < end; r += 16) {
      const y0r = v128.load(r);
      const y0i = v128.load(i);
      const e1r = v128.load(r + quarter);
      const e1i = v128.load(i + quarter);
      const w1r = v128.load(f);
      const w1i = v128.load(f, 16);
      const y1r = f64x2.add(f64x2.mul(e1r, w1r), f64x2.mul(e1i, w1i));
      const y1i = f64x2.sub(f64x2.mul(e1i, w1r), f64x2.mul(e1r, w1i));
      const e2r = v128.load(r + half);
      const e2i = v128.load(i + half);
      const w2r = v128.load(f, 32);
      const w2i = v128.load(f, 48);
      const y2r = f64x2.add(f64x2.mul(e2r, w2r), f64x2.mul(e2i, w2i));
      const y2i = f64x2.sub(f64x2.mul(e2i, w2r), f64x2.mul(e2r, w2i));
      const e3r = v128.load(r + half + quarter);
      const e3i = v128.load(i + half + quarter);
      const w3r = v128.load(f, 64);
      const w3i = v128.load(f, 80);
      const y3r = f64x2.add(f64x2.mul(e3r, w3r), f64x2.mul(e3i, w3i));
      const y3i = f64x2.sub(f64x2.mul(e3i, w3r), f64x2.mul(e3r, w3i));
      const sum02r = f64x2.add(y0r, y2r);
      const sum02i = f64x2.add(y0i, y2i);
      const dif02r = f64x2.sub(y0r, y2r);
      const dif02i = f64x2.sub(y0i, y2i);
      const sum13r = f64x2.add(y1r, y3r);
      const sum13i = f64x2.add(y1i, y3i);
      const dif13r = f64x2.sub(y1r, y3r);
      const dif13i = f64x2.sub(y1i, y3i);
      v128.store(r, f64x2.add(sum02r, sum13r));
      v128.store(i, f64x2.add(sum02i, sum13i));
      v128.store(r + quarter, f64x2.sub(dif02r, dif13i));
      v128.store(i + quarter, f64x2.add(dif02i, dif13r));
      v128.store(r + half, f64x2.sub(sum02r, sum13r));
      v128.store(i + half, f64x2.sub(sum02i, sum13i));
      v128.store(r + half + quarter, f64x2.add(dif02r, dif13i));
      v128.store(i + half + quarter, f64x2.sub(dif02i, dif13r));
      f += FACTORS;
      i += 16;
    }
  }
}

// @ts-ignore: a constant of the target
const SECOND_MINUS: v128 = f64x2(1, -1);

/** (a + b, a − b) of the two values of a vector. */
// @ts-ignore: decorator
@inline
function sumAndDifference(v: v128): v128 {
  return f64x2.add(f64x2.mul(v, SECOND_MINUS), v128.shuffle<f64>(v, v, 1, 0));
}

/** What is left after the stages of four: sub-transforms of two values, its own inverse but for a factor of 2. */
// @ts-ignore: decorator
@inline
function twos(from: usize, bytes: usize): void {
  const end = from + bytes;
  for (let at = from; at < end; at += 16) v128.store(at, sumAndDifference(v128.load(at)));
}

/** Sub-transforms of four values, forward. */
// @ts-ignore: decorator
@inline
function splitFours(re: usize, im: usize, bytes: usize): void {
  const end = re + bytes;
  let i = im;
  for (let r = re; r < end; r += 32) {
    const r01 = v128.load(r);
    const r23 = v128.load(r, 16);
    const i01 = v128.load(i);
    const i23 = v128.load(i, 16);
    const dr = f64x2.sub(r01, r23);
    const di = f64x2.sub(i01, i23);
    v128.store(r, sumAndDifference(f64x2.add(r01, r23)));
    v128.store(i, sumAndDifference(f64x2.add(i01, i23)));
    // The second difference turned by −i.
    const tr = v128.shuffle<f64>(dr, di, 0, 3);
    const ti = f64x2.mul(v128.shuffle<f64>(di, dr, 0, 3), SECOND_MINUS);
    v128.store(r, sumAndDifference(tr), 16);
    v128.store(i, sumAndDifference(ti), 16);
    i += 32;
  }
}

/** Undoes `splitFours`, but for a factor of 4. */
// @ts-ignore: decorator
@inline
function joinFours(re: usize, im: usize, bytes: usize): void {
  const end = re + bytes;
  let i = im;
  for (let r = re; r < end; r += 32) {
    const sr = sumAndDifference(v128.load(r));
    const si = sumAndDifference(v128.load(i));
    const tr = sumAndDifference(v128.load(r, 16));
    const ti = f64x2.mul(sumAndDifference(v128.load(i, 16)), SECOND_MINUS);
    const dr = v128.shuffle<f64>(tr, ti, 0, 3);
    const di = v128.shuffle<f64>(ti, tr, 0, 3);
    v128.store(r, f64x2.add(sr, dr));
    v128.store(r, f64x2.sub(sr, dr), 16);
    v128.store(i, f64x2.add(si, di));
    v128.store(i, f64x2.sub(si, di), 16);
    i += 32;
  }
}

/**
 * Values of a real series × exp(−iπj/2B), then their transform: the spectrum of B values followed by B zeros at its odd frequencies.
 *
 * @param re holds `count` real values and receives the real parts, im the imaginary parts; `size` = B values each
 * @param twist cos, −sin of πj/2B, two values of j at a time
 */
export function spectrumOfBlock(re: usize, im: usize, count: usize, size: usize, twist: usize, factors: usize): void {
  const bytes = size << 3;
  const filled = (count + 1) & ~1;
  if (count < filled) store<f64>(re + (count << 3), 0);
  const end = re + (filled << 3);
  let i = im;
  let t = twist;
  for (let r = re; r < end; r += 16) {
    const x = v128.load(r);
    v128.store(r, f64x2.mul(x, v128.load(t)));
    v128.store(i, f64x2.mul(x, v128.load(t, 16)));
    i += 16;
    t += 32;
  }
  if (filled < size) {
    memory.fill(end, 0, bytes - (filled << 3));
    memory.fill(i, 0, bytes - (filled << 3));
  }
  let length = size;
  let f = factors;
  while (length >= 8) {
    splitStage(re, im, bytes, length, f);
    f += (length >> 3) * FACTORS;
    length >>= 2;
  }
  if (length === 4) splitFours(re, im, bytes);
  else {
    twos(re, bytes);
    twos(im, bytes);
  }
}

/**
 * Adds conj(X) (Y − iZ): the products of one block of x with the window that begins with the same block of y and goes on with the next.
 *
 * @param x,y,z,sum real parts; the imaginary parts lie `apart` bytes behind. `from`, `to`: bytes
 */
export function addProducts(x: usize, y: usize, z: usize, sum: usize, apart: usize, from: usize, to: usize): void {
  for (let at = from; at < to; at += 16) {
    const xr = v128.load(x + at);
    const xi = v128.load(x + apart + at);
    const wr = f64x2.add(v128.load(y + at), v128.load(z + apart + at));
    const wi = f64x2.sub(v128.load(y + apart + at), v128.load(z + at));
    const sr = v128.load(sum + at);
    const si = v128.load(sum + apart + at);
    v128.store(sum + at, f64x2.add(sr, f64x2.add(f64x2.mul(xr, wr), f64x2.mul(xi, wi))));
    v128.store(sum + apart + at, f64x2.add(si, f64x2.sub(f64x2.mul(xr, wi), f64x2.mul(xi, wr))));
  }
}

/** Turns sums of products back: `re` then holds Σ x(j) y(j + p) for p = 0 … B − 1. */
export function sumsOfProducts(re: usize, im: usize, size: usize, twist: usize, factorsEnd: usize): void {
  const bytes = size << 3;
  let length = size;
  while (length >= 8) length >>= 2;
  if (length === 4) joinFours(re, im, bytes);
  else {
    twos(re, bytes);
    twos(im, bytes);
  }
  let f = factorsEnd;
  while (length < size) {
    length <<= 2;
    f -= (length >> 3) * FACTORS;
    joinStage(re, im, bytes, length, f);
  }
  const scale = f64x2.splat(1.0 / <f64>size);
  const end = re + bytes;
  let i = im;
  let t = twist;
  for (let r = re; r < end; r += 16) {
    const cosine = v128.load(t);
    const minusSine = v128.load(t, 16);
    v128.store(
      r,
      f64x2.mul(f64x2.add(f64x2.mul(v128.load(r), cosine), f64x2.mul(v128.load(i), minusSine)), scale),
    );
    i += 16;
    t += 32;
  }
}
