/**
 * Transforms, sums and counts over whole series in double precision, two values at a time. AssemblyScript, compiled by
 * scripts/build-wasm.mjs into ../kernel.generated.ts. Memory is laid out by ../lagged-products.ts and ../series-kernel.ts; nothing is
 * allocated here. NaN is a missing sample everywhere but in transforms.
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

// ------------------------------------------------------------------------------------------------------------ stages

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

// ------------------------------------------------------------------------------------------------------------ sums

// @ts-ignore: decorator
@inline
function lanesAdded(v: v128): f64 {
  return f64x2.extract_lane(v, 0) + f64x2.extract_lane(v, 1);
}

/** Loads two values, or one and a NaN at the odd end. */
// @ts-ignore: decorator
@inline
function loadUpTo(at: usize, end: usize): v128 {
  return at + 8 === end ? f64x2.replace_lane(v128.load64_zero(at), 1, NaN) : v128.load(at);
}

/** out: valid values, Σd, Σd², min, max, with d = x − origin. */
export function sums(x: usize, n: i32, origin: f64, out: usize): void {
  const end = x + (n << 3);
  const o = f64x2.splat(origin);
  let count = i64x2.splat(0);
  let s1 = f64x2.splat(0);
  let s2 = f64x2.splat(0);
  let t1 = f64x2.splat(0);
  let t2 = f64x2.splat(0);
  let min = f64x2.splat(Infinity);
  let max = f64x2.splat(-Infinity);
  let at = x;
  for (; at + 32 <= end; at += 32) {
    const a = v128.load(at);
    const b = v128.load(at, 16);
    const ma = f64x2.eq(a, a);
    const mb = f64x2.eq(b, b);
    const da = v128.and(f64x2.sub(a, o), ma);
    const db = v128.and(f64x2.sub(b, o), mb);
    count = i64x2.sub(count, i64x2.add(ma, mb));
    s1 = f64x2.add(s1, da);
    t1 = f64x2.add(t1, db);
    s2 = f64x2.add(s2, f64x2.mul(da, da));
    t2 = f64x2.add(t2, f64x2.mul(db, db));
    min = f64x2.pmin(f64x2.pmin(min, a), b);
    max = f64x2.pmax(f64x2.pmax(max, a), b);
  }
  for (; at < end; at += 16) {
    const a = loadUpTo(at, end);
    const ma = f64x2.eq(a, a);
    const da = v128.and(f64x2.sub(a, o), ma);
    count = i64x2.sub(count, ma);
    s1 = f64x2.add(s1, da);
    s2 = f64x2.add(s2, f64x2.mul(da, da));
    min = f64x2.pmin(min, a);
    max = f64x2.pmax(max, a);
  }
  store<f64>(out, <f64>(i64x2.extract_lane(count, 0) + i64x2.extract_lane(count, 1)));
  store<f64>(out, lanesAdded(f64x2.add(s1, t1)), 8);
  store<f64>(out, lanesAdded(f64x2.add(s2, t2)), 16);
  store<f64>(out, Math.min(f64x2.extract_lane(min, 0), f64x2.extract_lane(min, 1)), 24);
  store<f64>(out, Math.max(f64x2.extract_lane(max, 0), f64x2.extract_lane(max, 1)), 32);
}

/** out: valid values, Σd, Σtd over them, Σt, Σt² over the missing ones, with d = x − origin and t = start + index. */
export function lineSums(x: usize, n: i32, origin: f64, start: f64, out: usize): void {
  const end = x + (n << 3);
  const o = f64x2.splat(origin);
  const two = f64x2.splat(2);
  let t = f64x2.replace_lane(f64x2.splat(start), 1, start + 1);
  let count = i64x2.splat(0);
  let sumD = f64x2.splat(0);
  let sumTD = f64x2.splat(0);
  let missingT = f64x2.splat(0);
  let missingTT = f64x2.splat(0);
  for (let at = x; at < end; at += 16) {
    const isOdd = at + 8 === end;
    const a = loadUpTo(at, end);
    const m = f64x2.eq(a, a);
    const d = v128.and(f64x2.sub(a, o), m);
    count = i64x2.sub(count, m);
    sumD = f64x2.add(sumD, d);
    sumTD = f64x2.add(sumTD, f64x2.mul(t, d));
    let gone = v128.andnot(t, m);
    if (isOdd) gone = f64x2.replace_lane(gone, 1, 0);
    missingT = f64x2.add(missingT, gone);
    missingTT = f64x2.add(missingTT, f64x2.mul(gone, gone));
    t = f64x2.add(t, two);
  }
  store<f64>(out, <f64>(i64x2.extract_lane(count, 0) + i64x2.extract_lane(count, 1)));
  store<f64>(out, lanesAdded(sumD), 8);
  store<f64>(out, lanesAdded(sumTD), 16);
  store<f64>(out, lanesAdded(missingT), 24);
  store<f64>(out, lanesAdded(missingTT), 32);
}

/** out: Σd², Σr², Σr³, Σr⁴, min, max, with d = x − mean and r = d − slope t, t = start + index. */
export function residualSums(x: usize, n: i32, mean: f64, slope: f64, start: f64, out: usize): void {
  const end = x + (n << 3);
  const o = f64x2.splat(mean);
  const b = f64x2.splat(slope);
  const two = f64x2.splat(2);
  let t = f64x2.replace_lane(f64x2.splat(start), 1, start + 1);
  let d2 = f64x2.splat(0);
  let r2 = f64x2.splat(0);
  let r3 = f64x2.splat(0);
  let r4 = f64x2.splat(0);
  let min = f64x2.splat(Infinity);
  let max = f64x2.splat(-Infinity);
  for (let at = x; at < end; at += 16) {
    const a = loadUpTo(at, end);
    const m = f64x2.eq(a, a);
    const d = v128.and(f64x2.sub(a, o), m);
    const r = v128.and(f64x2.sub(d, f64x2.mul(b, t)), m);
    const square = f64x2.mul(r, r);
    d2 = f64x2.add(d2, f64x2.mul(d, d));
    r2 = f64x2.add(r2, square);
    r3 = f64x2.add(r3, f64x2.mul(square, r));
    r4 = f64x2.add(r4, f64x2.mul(square, square));
    min = f64x2.pmin(min, a);
    max = f64x2.pmax(max, a);
    t = f64x2.add(t, two);
  }
  store<f64>(out, lanesAdded(d2));
  store<f64>(out, lanesAdded(r2), 8);
  store<f64>(out, lanesAdded(r3), 16);
  store<f64>(out, lanesAdded(r4), 24);
  store<f64>(out, Math.min(f64x2.extract_lane(min, 0), f64x2.extract_lane(min, 1)), 32);
  store<f64>(out, Math.max(f64x2.extract_lane(max, 0), f64x2.extract_lane(max, 1)), 40);
}

/** out: valid pairs, Σa, Σb, Σa², Σb², Σab, with a = x − nearX, b = y − nearY. */
export function pairSums(x: usize, y: usize, n: i32, nearX: f64, nearY: f64, out: usize): void {
  const end = x + (n << 3);
  const ox = f64x2.splat(nearX);
  const oy = f64x2.splat(nearY);
  let count = i64x2.splat(0);
  let s1x = f64x2.splat(0);
  let s1y = f64x2.splat(0);
  let s2x = f64x2.splat(0);
  let s2y = f64x2.splat(0);
  let sxy = f64x2.splat(0);
  const shift = y - x;
  let at = x;
  // Whole vectors first, without a question in the loop; the odd end below.
  const whole = x + ((n & ~1) << 3);
  for (; at < whole; at += 16) {
    const a = f64x2.sub(v128.load(at), ox);
    const b = f64x2.sub(v128.load(at + shift), oy);
    const p = f64x2.mul(a, b);
    const m = f64x2.eq(p, p);
    const da = v128.and(a, m);
    const db = v128.and(b, m);
    count = i64x2.sub(count, m);
    s1x = f64x2.add(s1x, da);
    s1y = f64x2.add(s1y, db);
    s2x = f64x2.add(s2x, f64x2.mul(da, da));
    s2y = f64x2.add(s2y, f64x2.mul(db, db));
    sxy = f64x2.add(sxy, v128.and(p, m));
  }
  if (at < end) {
    const a = f64x2.sub(loadUpTo(at, end), ox);
    const b = f64x2.sub(loadUpTo(at + shift, end + shift), oy);
    const p = f64x2.mul(a, b);
    const m = f64x2.eq(p, p);
    const da = v128.and(a, m);
    const db = v128.and(b, m);
    count = i64x2.sub(count, m);
    s1x = f64x2.add(s1x, da);
    s1y = f64x2.add(s1y, db);
    s2x = f64x2.add(s2x, f64x2.mul(da, da));
    s2y = f64x2.add(s2y, f64x2.mul(db, db));
    sxy = f64x2.add(sxy, v128.and(p, m));
  }
  store<f64>(out, <f64>(i64x2.extract_lane(count, 0) + i64x2.extract_lane(count, 1)));
  store<f64>(out, lanesAdded(s1x), 8);
  store<f64>(out, lanesAdded(s1y), 16);
  store<f64>(out, lanesAdded(s2x), 24);
  store<f64>(out, lanesAdded(s2y), 32);
  store<f64>(out, lanesAdded(sxy), 40);
}

/** into += factor (x − mean); a missing x makes the result missing if it is required, else it changes nothing. */
export function addScaled(x: usize, n: i32, mean: f64, factor: f64, isRequired: bool, into: usize): void {
  const o = f64x2.splat(mean);
  const f = f64x2.splat(factor);
  let i = 0;
  for (; i + 2 <= n; i += 2) {
    const at = <usize>i << 3;
    let d = f64x2.mul(f64x2.sub(v128.load(x + at), o), f);
    if (!isRequired) d = v128.and(d, f64x2.eq(d, d));
    v128.store(into + at, f64x2.add(v128.load(into + at), d));
  }
  if (i < n) {
    const at = <usize>i << 3;
    const d = (load<f64>(x + at) - mean) * factor;
    if (isRequired || d === d) store<f64>(into + at, load<f64>(into + at) + d);
  }
}

/** into = x − level − slope t, with t = start + index. */
export function withoutLine(x: usize, n: i32, level: f64, slope: f64, start: f64, into: usize): void {
  const end = x + (n << 3);
  const o = f64x2.splat(level);
  const b = f64x2.splat(slope);
  const two = f64x2.splat(2);
  let t = f64x2.replace_lane(f64x2.splat(start), 1, start + 1);
  let to = into;
  for (let at = x; at < end; at += 16) {
    v128.store(to, f64x2.sub(f64x2.sub(loadUpTo(at, end), o), f64x2.mul(b, t)));
    t = f64x2.add(t, two);
    to += 16;
  }
}

/** out: samples with both components, Σu, Σv, those that move, and Σ u/|(u, v)|, Σ v/|(u, v)| over them. */
export function directionSums(u: usize, v: usize, n: i32, out: usize): void {
  const end = u + (n << 3);
  const zero = f64x2.splat(0);
  let count = i64x2.splat(0);
  let moving = i64x2.splat(0);
  let sumU = zero;
  let sumV = zero;
  let sine = zero;
  let cosine = zero;
  let atV = v;
  for (let at = u; at < end; at += 16) {
    const x = loadUpTo(at, end);
    const y = at + 8 === end ? v128.load64_zero(atV) : v128.load(atV);
    const speed = f64x2.sqrt(f64x2.add(f64x2.mul(x, x), f64x2.mul(y, y)));
    const m = f64x2.eq(speed, speed);
    const g = f64x2.gt(speed, zero);
    count = i64x2.sub(count, m);
    moving = i64x2.sub(moving, g);
    sumU = f64x2.add(sumU, v128.and(x, m));
    sumV = f64x2.add(sumV, v128.and(y, m));
    sine = f64x2.add(sine, v128.and(f64x2.div(x, speed), g));
    cosine = f64x2.add(cosine, v128.and(f64x2.div(y, speed), g));
    atV += 16;
  }
  store<f64>(out, <f64>(i64x2.extract_lane(count, 0) + i64x2.extract_lane(count, 1)));
  store<f64>(out, lanesAdded(sumU), 8);
  store<f64>(out, lanesAdded(sumV), 16);
  store<f64>(out, <f64>(i64x2.extract_lane(moving, 0) + i64x2.extract_lane(moving, 1)), 24);
  store<f64>(out, lanesAdded(sine), 32);
  store<f64>(out, lanesAdded(cosine), 40);
}

/** into = w/|(u, v)|, 0 in still air, NaN where a component is missing; returns how many are beyond ± limit. */
export function slopes(u: usize, v: usize, w: usize, n: i32, limit: f64, into: usize): i32 {
  const bytes = <usize>n << 3;
  const zero = f64x2.splat(0);
  const most = f64x2.splat(limit);
  let steep: i32 = 0;
  for (let i: usize = 0; i < bytes; i += 16) {
    const isOdd = i + 8 === bytes;
    const x = isOdd ? v128.load64_zero(u + i) : v128.load(u + i);
    const y = isOdd ? v128.load64_zero(v + i) : v128.load(v + i);
    const z = isOdd ? v128.load64_zero(w + i) : v128.load(w + i);
    const level = f64x2.sqrt(f64x2.add(f64x2.mul(x, x), f64x2.mul(y, y)));
    const ratio = v128.bitselect(f64x2.mul(zero, level), f64x2.div(z, level), f64x2.eq(z, zero));
    v128.store(into + i, ratio);
    steep += popcnt(i64x2.bitmask(f64x2.gt(f64x2.abs(ratio), most)));
  }
  return steep;
}

/** Whether all of some 32-bit numbers are the same as `code`. */
export function areAll(x: usize, n: i32, code: i32): bool {
  const end = x + (n << 2);
  const same = i32x4.splat(code);
  let at = x;
  for (; at + 16 <= end; at += 16) if (!i32x4.all_true(i32x4.eq(v128.load(at), same))) return false;
  for (; at < end; at += 4) if (load<i32>(at) !== code) return false;
  return true;
}

/** into = factor × x + offset of single-precision x, squared first where asked; infinities become missing. */
export function convertSingles(x: usize, n: i32, factor: f64, offset: f64, isSquared: bool, into: usize): void {
  const f = f64x2.splat(factor);
  const o = f64x2.splat(offset);
  const none = f64x2.splat(NaN);
  const zero = f64x2.splat(0);
  let to = into;
  const end = to + (n << 3);
  for (let at = x; to < end; at += 8) {
    let value = f64x2.promote_low_f32x4(v128.load64_zero(at));
    if (isSquared) value = f64x2.mul(value, value);
    const inner = f64x2.add(f64x2.mul(value, f), o);
    v128.store(to, v128.bitselect(inner, none, f64x2.eq(f64x2.sub(inner, inner), zero)));
    to += 16;
  }
}

// ------------------------------------------------------------------------------------------------------------ in place

/** Makes values outside of [low, high] missing; out: how many were below, how many above. */
export function leaveOutOutside(x: usize, n: i32, low: f64, high: f64, out: usize): void {
  const end = x + (n << 3);
  const bottom = f64x2.splat(low);
  const top = f64x2.splat(high);
  let below: i64 = 0;
  let above: i64 = 0;
  for (let at = x; at < end; at += 16) {
    const v = loadUpTo(at, end);
    if (!v128.any_true(v128.or(f64x2.lt(v, bottom), f64x2.gt(v, top)))) continue;
    for (let one = at; one < at + 16 && one < end; one += 8) {
      const value = load<f64>(one);
      if (value < low) {
        below++;
        store<f64>(one, NaN);
      } else if (value > high) {
        above++;
        store<f64>(one, NaN);
      }
    }
  }
  store<f64>(out, <f64>below);
  store<f64>(out, <f64>above, 8);
}

/** out: samples that have all three components, their sums. */
export function vectorSums(u: usize, v: usize, w: usize, n: i32, out: usize): void {
  const end = u + (n << 3);
  let count = i64x2.splat(0);
  let sumU = f64x2.splat(0);
  let sumV = f64x2.splat(0);
  let sumW = f64x2.splat(0);
  let atV = v;
  let atW = w;
  for (let at = u; at < end; at += 16) {
    const isOdd = at + 8 === end;
    const x = loadUpTo(at, end);
    const y = isOdd ? v128.load64_zero(atV) : v128.load(atV);
    const z = isOdd ? v128.load64_zero(atW) : v128.load(atW);
    const total = f64x2.add(f64x2.add(x, y), z);
    const m = f64x2.eq(total, total);
    count = i64x2.sub(count, m);
    sumU = f64x2.add(sumU, v128.and(x, m));
    sumV = f64x2.add(sumV, v128.and(y, m));
    sumW = f64x2.add(sumW, v128.and(z, m));
    atV += 16;
    atW += 16;
  }
  store<f64>(out, <f64>(i64x2.extract_lane(count, 0) + i64x2.extract_lane(count, 1)));
  store<f64>(out, lanesAdded(sumU), 8);
  store<f64>(out, lanesAdded(sumV), 16);
  store<f64>(out, lanesAdded(sumW), 24);
}

/** Rotates three components in place by the nine numbers at `matrix`; a sample without one of them loses all. */
export function rotate(u: usize, v: usize, w: usize, n: i32, matrix: usize): void {
  const a = v128.load64_splat(matrix);
  const b = v128.load64_splat(matrix, 8);
  const c = v128.load64_splat(matrix, 16);
  const d = v128.load64_splat(matrix, 24);
  const e = v128.load64_splat(matrix, 32);
  const f = v128.load64_splat(matrix, 40);
  const g = v128.load64_splat(matrix, 48);
  const h = v128.load64_splat(matrix, 56);
  const k = v128.load64_splat(matrix, 64);
  const none = f64x2.splat(NaN);
  // At an odd count the value behind the last is turned too; it belongs to nobody.
  for (let i: usize = 0; i < <usize>n << 3; i += 16) {
    const x = v128.load(u + i);
    const y = v128.load(v + i);
    const z = v128.load(w + i);
    const total = f64x2.add(f64x2.add(x, y), z);
    const m = f64x2.eq(total, total);
    const p = f64x2.add(f64x2.add(f64x2.mul(a, x), f64x2.mul(b, y)), f64x2.mul(c, z));
    const q = f64x2.add(f64x2.add(f64x2.mul(d, x), f64x2.mul(e, y)), f64x2.mul(f, z));
    const r = f64x2.add(f64x2.add(f64x2.mul(g, x), f64x2.mul(h, y)), f64x2.mul(k, z));
    v128.store(u + i, v128.bitselect(p, none, m));
    v128.store(v + i, v128.bitselect(q, none, m));
    v128.store(w + i, v128.bitselect(r, none, m));
  }
}

// ------------------------------------------------------------------------------------------------------------ order

/** Copies the valid values to `into`; out: min, max. Returns how many there are. */
export function takeValid(x: usize, n: i32, into: usize, out: usize): i32 {
  const end = x + (n << 3);
  let to = into;
  let min = f64x2.splat(Infinity);
  let max = f64x2.splat(-Infinity);
  for (let at = x; at < end; at += 16) {
    const a = loadUpTo(at, end);
    min = f64x2.pmin(min, a);
    max = f64x2.pmax(max, a);
    const valid = i64x2.bitmask(f64x2.eq(a, a));
    if (valid === 3) {
      v128.store(to, a);
      to += 16;
    } else if (valid !== 0) {
      store<f64>(to, valid === 1 ? f64x2.extract_lane(a, 0) : f64x2.extract_lane(a, 1));
      to += 8;
    }
  }
  store<f64>(out, Math.min(f64x2.extract_lane(min, 0), f64x2.extract_lane(min, 1)));
  store<f64>(out, Math.max(f64x2.extract_lane(max, 0), f64x2.extract_lane(max, 1)), 8);
  return <i32>((to - into) >> 3);
}

/** x = |x − middle|, without gaps. */
export function deviations(x: usize, n: i32, middle: f64): void {
  const o = f64x2.splat(middle);
  const end = x + (((n + 1) & ~1) << 3);
  for (let at = x; at < end; at += 16) v128.store(at, f64x2.abs(f64x2.sub(v128.load(at), o)));
}

// @ts-ignore: decorator
@inline
function binsOf(v: v128, low: v128, scale: v128, last: v128): v128 {
  return i32x4.min_s(i32x4.trunc_sat_f64x2_s_zero(f64x2.mul(f64x2.sub(v, low), scale)), last);
}

/**
 * Counts values, none of them missing, in bins of equal width, and notes the bin of each.
 *
 * @param counts room for twice as many 32-bit numbers as there are bins
 * @param noted receives one 16-bit number for each value, and behind the last up to 7 that are no bin
 */
export function countInBins(
  x: usize,
  n: i32,
  min: f64,
  scale: f64,
  bins: i32,
  counts: usize,
  noted: usize,
): void {
  memory.fill(counts, 0, bins << 3);
  const second = counts + (bins << 2);
  const low = f64x2.splat(min);
  const factor = f64x2.splat(scale);
  const last = i32x4.splat(bins - 1);
  const end = x + (n << 3);
  let at = x;
  let note = noted;
  for (; at + 16 <= end; at += 16) {
    const bin = binsOf(v128.load(at), low, factor, last);
    const first = i32x4.extract_lane(bin, 0);
    const other = i32x4.extract_lane(bin, 1);
    // Two tables: neighbours are often in one bin, and the second would wait for the first.
    const a = counts + (first << 2);
    const b = second + (other << 2);
    store<i32>(a, load<i32>(a) + 1);
    store<i32>(b, load<i32>(b) + 1);
    store<i32>(note, first | (other << 16));
    note += 4;
  }
  if (at < end) {
    const bin = i32x4.extract_lane(binsOf(v128.load64_zero(at), low, factor, last), 0);
    const a = counts + (bin << 2);
    store<i32>(a, load<i32>(a) + 1);
    store<i16>(note, <i16>bin);
    note += 2;
  }
  v128.store(note, i16x8.splat(-1));
  for (let bin = counts; bin < second; bin += 4) {
    store<i32>(bin, load<i32>(bin) + load<i32>(bin + (bins << 2)));
  }
}

/** Copies the values whose noted bin is `wanted` to `into`, in order. Returns how many they are. */
export function takeBin(x: usize, n: i32, noted: usize, wanted: i32, into: usize): i32 {
  const want = i16x8.splat(<i16>wanted);
  let to = into;
  for (let i: i32 = 0; i < n; i += 8) {
    let hits = i16x8.bitmask(i16x8.eq(v128.load(noted + (i << 1)), want));
    while (hits !== 0) {
      store<f64>(to, load<f64>(x + ((i + ctz(hits)) << 3)));
      to += 8;
      hits &= hits - 1;
    }
  }
  return <i32>((to - into) >> 3);
}

// ------------------------------------------------------------------------------------------------------------ windows

/** total[i] = Σ d, squares[i] = Σ d² over the first i values, with d = x − offset; nothing missing. n + 1 values each. */
export function runningSums(x: usize, n: i32, offset: f64, total: usize, squares: usize): void {
  let sum: f64 = 0;
  let square: f64 = 0;
  store<f64>(total, 0);
  store<f64>(squares, 0);
  for (let i = 0; i < n; i++) {
    const d = load<f64>(x + (i << 3)) - offset;
    sum += d;
    square += d * d;
    store<f64>(total + (i << 3), sum, 8);
    store<f64>(squares + (i << 3), square, 8);
  }
}

/** Places that are looked at together for whether one of them is a new largest one. */
const STRETCH: usize = 512;

/**
 * Largest steps between the halves of a sliding window, from running sums; out: n |step of the mean|, its place, n |step of the
 * variance|, its place, with n = half. With s and q the sums of either half: s₂ − s₁, and (q₂ − q₁) − (s₂ − s₁)(s₂ + s₁)/n.
 */
export function largestSteps(total: usize, squares: usize, n: i32, half: i32, out: usize): void {
  const reach: usize = half << 3;
  const perSample = f64x2.splat(1.0 / <f64>half);
  const shift = squares - total;
  const first = total + reach;
  const end = total + (<usize>(n - half + 1) << 3);
  let meanStep: f64 = -1;
  let meanAt: usize = first;
  let varianceStep: f64 = -1;
  let varianceAt: usize = first;
  for (let from = first; from < end; from += STRETCH) {
    const to = from + STRETCH < end ? from + STRETCH : end;
    let largest = f64x2.splat(-1);
    let largestChange = f64x2.splat(-1);
    let at = from;
    // The odd last place is looked at twice rather than apart.
    if (to - from >= 16) {
      for (; at < to; at += 16) {
        if (at + 8 === to) at -= 8;
        const here = v128.load(at);
        const before = v128.load(at - reach);
        const after = v128.load(at + reach);
        const step = f64x2.sub(f64x2.sub(after, here), f64x2.sub(here, before));
        largest = f64x2.pmax(largest, f64x2.abs(step));
        const s = at + shift;
        const middle = v128.load(s);
        const squaresStep = f64x2.sub(
          f64x2.sub(v128.load(s + reach), middle),
          f64x2.sub(middle, v128.load(s - reach)),
        );
        const change = f64x2.sub(squaresStep, f64x2.mul(f64x2.mul(step, f64x2.sub(after, before)), perSample));
        largestChange = f64x2.pmax(largestChange, f64x2.abs(change));
      }
    } else {
      largest = f64x2.splat(Infinity);
      largestChange = largest;
    }
    const best = Math.max(f64x2.extract_lane(largest, 0), f64x2.extract_lane(largest, 1));
    const bestChange = Math.max(f64x2.extract_lane(largestChange, 0), f64x2.extract_lane(largestChange, 1));
    if (best <= meanStep && bestChange <= varianceStep) continue;
    for (let place = from; place < to; place += 8) {
      const here = load<f64>(place);
      const before = load<f64>(place - reach);
      const after = load<f64>(place + reach);
      const step = after - here - (here - before);
      if (Math.abs(step) > meanStep) {
        meanStep = Math.abs(step);
        meanAt = place;
      }
      const s = place + shift;
      const squaresStep = load<f64>(s + reach) - load<f64>(s) - (load<f64>(s) - load<f64>(s - reach));
      const change = Math.abs(squaresStep - step * (after - before) * f64x2.extract_lane(perSample, 0));
      if (change > varianceStep) {
        varianceStep = change;
        varianceAt = place;
      }
    }
  }
  store<f64>(out, meanStep);
  store<f64>(out, <f64>((meanAt - total) >> 3), 8);
  store<f64>(out, varianceStep, 16);
  store<f64>(out, <f64>((varianceAt - total) >> 3), 24);
}

/** Counts a value in its bin, and its run among the longest of that bin. */
// @ts-ignore: decorator
@inline
function countRun(bin: i32, run: i32, counts: usize, longest: usize): void {
  const at = bin << 2;
  store<i32>(counts + at, load<i32>(counts + at) + 1);
  const known = load<i32>(longest + at);
  store<i32>(longest + at, select<i32>(run, known, run > known));
}

/**
 * Counts values, none of them missing, in bins, and the longest run of each bin; values beyond the ends count in the end bins.
 *
 * @param counts,longest one 32-bit number for each bin
 * @returns how many values have a neighbour in the same bin
 */
export function runsInBins(
  x: usize,
  n: i32,
  low: f64,
  width: f64,
  bins: i32,
  counts: usize,
  longest: usize,
): i32 {
  memory.fill(counts, 0, bins << 2);
  memory.fill(longest, 0, bins << 2);
  const begin = f64x2.splat(low);
  const step = f64x2.splat(width);
  const last = i32x4.splat(bins - 1);
  const zero = i32x4.splat(0);
  let previous: i32 = -1;
  let run: i32 = 0;
  // A run of two brings two values in company, each further one itself.
  let inCompany: i32 = 0;
  const end = x + (n << 3);
  let at = x;
  for (; at + 16 <= end; at += 16) {
    const raw = i32x4.trunc_sat_f64x2_s_zero(f64x2.div(f64x2.sub(v128.load(at), begin), step));
    const bin = i32x4.max_s(i32x4.min_s(raw, last), zero);
    const a = i32x4.extract_lane(bin, 0);
    const b = i32x4.extract_lane(bin, 1);
    const runA = select<i32>(run + 1, 1, a === previous);
    const runB = select<i32>(runA + 1, 1, b === a);
    countRun(a, runA, counts, longest);
    countRun(b, runB, counts, longest);
    inCompany += i32(runA > 1) + i32(runA === 2) + i32(runB > 1) + i32(runB === 2);
    previous = b;
    run = runB;
  }
  if (at < end) {
    const raw = i32x4.trunc_sat_f64x2_s_zero(f64x2.div(f64x2.sub(v128.load64_zero(at), begin), step));
    const bin = i32x4.extract_lane(i32x4.max_s(i32x4.min_s(raw, last), zero), 0);
    run = select<i32>(run + 1, 1, bin === previous);
    countRun(bin, run, counts, longest);
    inCompany += i32(run > 1) + i32(run === 2);
  }
  return inCompany;
}

// ------------------------------------------------------------------------------------------------------------ transforms of blocks

/**
 * Values of a real series, less their mean, × exp(−iπj/2B), then their transform: the spectrum of B values followed by B zeros at its odd
 * frequencies. Missing values count as 0.
 *
 * @param re holds `count` real values and receives the real parts, im the imaginary parts; `size` = B values each
 * @param isMasked im then holds `count` values of another series; where that is missing, so is this one
 * @param twist cos, −sin of πj/2B, two values of j at a time
 */
export function spectrumOfBlock(
  re: usize,
  im: usize,
  count: usize,
  size: usize,
  mean: f64,
  isMasked: bool,
  twist: usize,
  factors: usize,
): void {
  const bytes = size << 3;
  const filled = (count + 1) & ~1;
  if (count < filled) store<f64>(re + (count << 3), NaN);
  const end = re + (filled << 3);
  const level = f64x2.splat(mean);
  let i = im;
  let t = twist;
  for (let r = re; r < end; r += 16) {
    const raw = v128.load(r);
    let valid = f64x2.eq(raw, raw);
    if (isMasked) {
      const other = v128.load(i);
      valid = v128.and(valid, f64x2.eq(other, other));
    }
    const x = v128.and(f64x2.sub(raw, level), valid);
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

/** Bytes of every spectrum that are multiplied before going on to the next: what is in use then fits the nearest cache. */
const TILE: usize = 2048;

/**
 * Adds conj(X) (Y − iZ): the products of one block of x with the window that begins with the same block of y and goes on with the next.
 *
 * @param list four pointers for each of `count` sums: x, y, z, sum, at their real parts; the imaginary parts lie `apart` bytes behind
 * @param bytes of one part
 */
export function addProducts(list: usize, count: i32, apart: usize, bytes: usize): void {
  const listEnd = list + (<usize>count << 4);
  for (let from: usize = 0; from < bytes; from += TILE) {
    const to = from + TILE < bytes ? from + TILE : bytes;
    for (let entry = list; entry < listEnd; entry += 16) {
      const x = <usize>load<u32>(entry);
      const y = <usize>load<u32>(entry, 4);
      const z = <usize>load<u32>(entry, 8);
      const sum = <usize>load<u32>(entry, 12);
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
