/**
 * Discrete Fourier transform in double precision for any length.
 *
 * Lengths whose prime factors are 2, 3 and 5 (36 000 samples of half an hour at 20 Hz among them) run as a self-sorting mixed-radix
 * transform; every other length goes through Bluestein's chirp convolution on such a length. Twiddle factors and scratch memory belong to
 * the transform object, so that a transform costs no allocation after the first call.
 *
 * X[k] = Σ x[j] exp(−2πi jk/n); the inverse divides by n.
 *
 * @reference Stockham (1966), High-speed convolution and correlation, AFIPS Proc. 28, pp. 229–233 (self-sorting order; from memory).
 * @reference Bluestein (1970), A linear filtering approach to the computation of the discrete Fourier transform, IEEE Trans. Audio
 *   Electroacoust. 18, pp. 451–455 (arbitrary length; from memory).
 */
export interface Fft {
  readonly length: number;
  /** Replaces (re, im), each of `length` values, by their transform. */
  forward(re: Float64Array, im: Float64Array): void;
  /** Replaces (re, im) by their inverse transform (divided by `length`). */
  inverse(re: Float64Array, im: Float64Array): void;
}

/** Whether n has no prime factor above 5. */
export function isSmooth(n: number): boolean {
  if (!Number.isInteger(n) || n < 1) return false;
  let rest = n;
  for (const prime of [2, 3, 5]) while (rest % prime === 0) rest /= prime;
  return rest === 1;
}

/**
 * Smallest length ≥ n whose prime factors are 2, 3 and 5: the length to zero-pad to.
 *
 * @param n wanted length, at least 1
 */
export function nextSmoothLength(n: number): number {
  const least = Math.max(1, Math.ceil(n));
  let best = Infinity;
  for (let five = 1; five < best; five *= 5) {
    for (let three = five; three < best; three *= 3) {
      let candidate = three;
      while (candidate < least) candidate *= 2;
      if (candidate < best) best = candidate;
      if (three >= least) break;
    }
    if (five >= least) break;
  }
  return best;
}

interface Stage {
  radix: 2 | 3 | 4 | 5;
  /** Sub-transforms left after this stage have this length. */
  count: number;
  /** Distance of neighbouring values of one sub-transform. */
  stride: number;
  /** cos and −sin of 2π p j / (radix·count), (radix − 1) pairs for every p. */
  twiddles: Float64Array;
}

function planStages(n: number): Stage[] {
  const radices: (2 | 3 | 4 | 5)[] = [];
  let rest = n;
  for (const radix of [4, 2, 3, 5] as const) {
    while (rest % radix === 0) {
      radices.push(radix);
      rest /= radix;
    }
  }
  const stages: Stage[] = [];
  let length = n;
  let stride = 1;
  for (const radix of radices) {
    const count = length / radix;
    const twiddles = new Float64Array(count * (radix - 1) * 2);
    for (let p = 0, t = 0; p < count; p++) {
      for (let j = 1; j < radix; j++) {
        const angle = (-2 * Math.PI * ((p * j) % length)) / length;
        twiddles[t++] = Math.cos(angle);
        twiddles[t++] = Math.sin(angle);
      }
    }
    stages.push({ radix, count, stride, twiddles });
    length = count;
    stride *= radix;
  }
  return stages;
}

function passTwo(stage: Stage, xr: Float64Array, xi: Float64Array, yr: Float64Array, yi: Float64Array): void {
  const { count, stride, twiddles } = stage;
  const far = stride * count;
  for (let p = 0; p < count; p++) {
    const wr = twiddles[2 * p];
    const wi = twiddles[2 * p + 1];
    const from = stride * p;
    const to = stride * 2 * p;
    for (let q = 0; q < stride; q++) {
      const a = from + q;
      const b = a + far;
      const ar = xr[a];
      const ai = xi[a];
      const br = xr[b];
      const bi = xi[b];
      const dr = ar - br;
      const di = ai - bi;
      const o = to + q;
      yr[o] = ar + br;
      yi[o] = ai + bi;
      yr[o + stride] = dr * wr - di * wi;
      yi[o + stride] = dr * wi + di * wr;
    }
  }
}

const sin60 = Math.sqrt(3) / 2;

function passThree(
  stage: Stage,
  xr: Float64Array,
  xi: Float64Array,
  yr: Float64Array,
  yi: Float64Array,
): void {
  const { count, stride, twiddles } = stage;
  const far = stride * count;
  for (let p = 0; p < count; p++) {
    const w1r = twiddles[4 * p];
    const w1i = twiddles[4 * p + 1];
    const w2r = twiddles[4 * p + 2];
    const w2i = twiddles[4 * p + 3];
    const from = stride * p;
    const to = stride * 3 * p;
    for (let q = 0; q < stride; q++) {
      const a = from + q;
      const b = a + far;
      const c = b + far;
      const ar = xr[a];
      const ai = xi[a];
      const sumR = xr[b] + xr[c];
      const sumI = xi[b] + xi[c];
      const difR = sin60 * (xr[b] - xr[c]);
      const difI = sin60 * (xi[b] - xi[c]);
      const midR = ar - 0.5 * sumR;
      const midI = ai - 0.5 * sumI;
      const e1r = midR + difI;
      const e1i = midI - difR;
      const e2r = midR - difI;
      const e2i = midI + difR;
      const o = to + q;
      yr[o] = ar + sumR;
      yi[o] = ai + sumI;
      yr[o + stride] = e1r * w1r - e1i * w1i;
      yi[o + stride] = e1r * w1i + e1i * w1r;
      yr[o + 2 * stride] = e2r * w2r - e2i * w2i;
      yi[o + 2 * stride] = e2r * w2i + e2i * w2r;
    }
  }
}

function passFour(
  stage: Stage,
  xr: Float64Array,
  xi: Float64Array,
  yr: Float64Array,
  yi: Float64Array,
): void {
  const { count, stride, twiddles } = stage;
  const far = stride * count;
  for (let p = 0; p < count; p++) {
    const t = 6 * p;
    const w1r = twiddles[t];
    const w1i = twiddles[t + 1];
    const w2r = twiddles[t + 2];
    const w2i = twiddles[t + 3];
    const w3r = twiddles[t + 4];
    const w3i = twiddles[t + 5];
    const from = stride * p;
    const to = stride * 4 * p;
    for (let q = 0; q < stride; q++) {
      const a = from + q;
      const b = a + far;
      const c = b + far;
      const d = c + far;
      const acR = xr[a] + xr[c];
      const acI = xi[a] + xi[c];
      const acDr = xr[a] - xr[c];
      const acDi = xi[a] - xi[c];
      const bdR = xr[b] + xr[d];
      const bdI = xi[b] + xi[d];
      const bdDr = xr[b] - xr[d];
      const bdDi = xi[b] - xi[d];
      const e1r = acDr + bdDi;
      const e1i = acDi - bdDr;
      const e2r = acR - bdR;
      const e2i = acI - bdI;
      const e3r = acDr - bdDi;
      const e3i = acDi + bdDr;
      const o = to + q;
      yr[o] = acR + bdR;
      yi[o] = acI + bdI;
      yr[o + stride] = e1r * w1r - e1i * w1i;
      yi[o + stride] = e1r * w1i + e1i * w1r;
      yr[o + 2 * stride] = e2r * w2r - e2i * w2i;
      yi[o + 2 * stride] = e2r * w2i + e2i * w2r;
      yr[o + 3 * stride] = e3r * w3r - e3i * w3i;
      yi[o + 3 * stride] = e3r * w3i + e3i * w3r;
    }
  }
}

const cos72 = (Math.sqrt(5) - 1) / 4;
const cos144 = -(Math.sqrt(5) + 1) / 4;
const sin72 = Math.sin((2 * Math.PI) / 5);
const sin144 = Math.sin((4 * Math.PI) / 5);

function passFive(
  stage: Stage,
  xr: Float64Array,
  xi: Float64Array,
  yr: Float64Array,
  yi: Float64Array,
): void {
  const { count, stride, twiddles } = stage;
  const far = stride * count;
  for (let p = 0; p < count; p++) {
    const t = 8 * p;
    const w1r = twiddles[t];
    const w1i = twiddles[t + 1];
    const w2r = twiddles[t + 2];
    const w2i = twiddles[t + 3];
    const w3r = twiddles[t + 4];
    const w3i = twiddles[t + 5];
    const w4r = twiddles[t + 6];
    const w4i = twiddles[t + 7];
    const from = stride * p;
    const to = stride * 5 * p;
    for (let q = 0; q < stride; q++) {
      const a = from + q;
      const b = a + far;
      const c = b + far;
      const d = c + far;
      const e = d + far;
      const ar = xr[a];
      const ai = xi[a];
      const s1r = xr[b] + xr[e];
      const s1i = xi[b] + xi[e];
      const d1r = xr[b] - xr[e];
      const d1i = xi[b] - xi[e];
      const s2r = xr[c] + xr[d];
      const s2i = xi[c] + xi[d];
      const d2r = xr[c] - xr[d];
      const d2i = xi[c] - xi[d];
      const m1r = ar + cos72 * s1r + cos144 * s2r;
      const m1i = ai + cos72 * s1i + cos144 * s2i;
      const m2r = ar + cos144 * s1r + cos72 * s2r;
      const m2i = ai + cos144 * s1i + cos72 * s2i;
      const n1r = sin72 * d1r + sin144 * d2r;
      const n1i = sin72 * d1i + sin144 * d2i;
      const n2r = sin144 * d1r - sin72 * d2r;
      const n2i = sin144 * d1i - sin72 * d2i;
      const e1r = m1r + n1i;
      const e1i = m1i - n1r;
      const e4r = m1r - n1i;
      const e4i = m1i + n1r;
      const e2r = m2r + n2i;
      const e2i = m2i - n2r;
      const e3r = m2r - n2i;
      const e3i = m2i + n2r;
      let o = to + q;
      yr[o] = ar + s1r + s2r;
      yi[o] = ai + s1i + s2i;
      o += stride;
      yr[o] = e1r * w1r - e1i * w1i;
      yi[o] = e1r * w1i + e1i * w1r;
      o += stride;
      yr[o] = e2r * w2r - e2i * w2i;
      yi[o] = e2r * w2i + e2i * w2r;
      o += stride;
      yr[o] = e3r * w3r - e3i * w3i;
      yi[o] = e3r * w3i + e3i * w3r;
      o += stride;
      yr[o] = e4r * w4r - e4i * w4i;
      yi[o] = e4r * w4i + e4i * w4r;
    }
  }
}

function createSmoothFft(n: number): Fft {
  const stages = planStages(n);
  const scratchRe = new Float64Array(n);
  const scratchIm = new Float64Array(n);

  function transform(re: Float64Array, im: Float64Array): void {
    let xr: Float64Array = re;
    let xi: Float64Array = im;
    let yr: Float64Array = scratchRe;
    let yi: Float64Array = scratchIm;
    for (const stage of stages) {
      if (stage.radix === 4) passFour(stage, xr, xi, yr, yi);
      else if (stage.radix === 5) passFive(stage, xr, xi, yr, yi);
      else if (stage.radix === 3) passThree(stage, xr, xi, yr, yi);
      else passTwo(stage, xr, xi, yr, yi);
      const keptRe = xr;
      const keptIm = xi;
      xr = yr;
      xi = yi;
      yr = keptRe;
      yi = keptIm;
    }
    if (xr !== re) {
      re.set(xr);
      im.set(xi);
    }
  }

  return withInverse(n, transform);
}

function createChirpFft(n: number): Fft {
  const inner = createFft(nextSmoothLength(2 * n - 1));
  const m = inner.length;
  const chirpCos = new Float64Array(n);
  const chirpSin = new Float64Array(n);
  for (let k = 0; k < n; k++) {
    // k² is reduced modulo 2n before it meets π: otherwise the phase loses digits for long series.
    const angle = (Math.PI * ((k * k) % (2 * n))) / n;
    chirpCos[k] = Math.cos(angle);
    chirpSin[k] = Math.sin(angle);
  }
  const kernelRe = new Float64Array(m);
  const kernelIm = new Float64Array(m);
  for (let k = 0; k < n; k++) {
    kernelRe[k] = chirpCos[k];
    kernelIm[k] = chirpSin[k];
    if (k > 0) {
      kernelRe[m - k] = chirpCos[k];
      kernelIm[m - k] = chirpSin[k];
    }
  }
  inner.forward(kernelRe, kernelIm);
  const workRe = new Float64Array(m);
  const workIm = new Float64Array(m);

  function transform(re: Float64Array, im: Float64Array): void {
    workRe.fill(0);
    workIm.fill(0);
    for (let k = 0; k < n; k++) {
      workRe[k] = re[k] * chirpCos[k] + im[k] * chirpSin[k];
      workIm[k] = im[k] * chirpCos[k] - re[k] * chirpSin[k];
    }
    inner.forward(workRe, workIm);
    for (let k = 0; k < m; k++) {
      const r = workRe[k] * kernelRe[k] - workIm[k] * kernelIm[k];
      workIm[k] = workRe[k] * kernelIm[k] + workIm[k] * kernelRe[k];
      workRe[k] = r;
    }
    inner.inverse(workRe, workIm);
    for (let k = 0; k < n; k++) {
      re[k] = workRe[k] * chirpCos[k] + workIm[k] * chirpSin[k];
      im[k] = workIm[k] * chirpCos[k] - workRe[k] * chirpSin[k];
    }
  }

  return withInverse(n, transform);
}

function withInverse(n: number, transform: (re: Float64Array, im: Float64Array) => void): Fft {
  function check(re: Float64Array, im: Float64Array): void {
    if (re.length !== n || im.length !== n) {
      throw new RangeError(`A transform of length ${n} was given ${re.length} and ${im.length} values`);
    }
  }
  return {
    length: n,
    forward(re, im) {
      check(re, im);
      transform(re, im);
    },
    inverse(re, im) {
      check(re, im);
      // Swapping real and imaginary parts turns the forward transform into n times the inverse one.
      transform(im, re);
      const scale = 1 / n;
      for (let k = 0; k < n; k++) {
        re[k] *= scale;
        im[k] *= scale;
      }
    },
  };
}

/**
 * Prepares a transform of length n (twiddles, scratch). Keep it, or use `sharedFft`: preparing costs more than one transform.
 *
 * @param n length, at least 1; any integer
 */
export function createFft(n: number): Fft {
  if (!Number.isInteger(n) || n < 1) throw new RangeError(`No transform of length ${n}`);
  return isSmooth(n) ? createSmoothFft(n) : createChirpFft(n);
}

const keptTransforms = 8;
const shared = new Map<number, Fft>();

/**
 * The transform of length n, prepared once per thread; the eight lengths used last are kept. A transform is not re-entrant, which plain
 * synchronous code never notices.
 */
export function sharedFft(n: number): Fft {
  let fft = shared.get(n);
  if (fft) shared.delete(n);
  else fft = createFft(n);
  shared.set(n, fft);
  if (shared.size > keptTransforms) {
    const oldest = shared.keys().next();
    if (!oldest.done) shared.delete(oldest.value);
  }
  return fft;
}

/** Half spectrum of a real series: values k = 0 … ⌊n/2⌋; the rest follows from X[n − k] = conj(X[k]). */
export interface HalfSpectrum {
  re: Float64Array;
  im: Float64Array;
}

/**
 * Power of two near a root mean square. Two series that share a transform are brought to the same size with it: rounding of the larger
 * would else drown digits of the smaller. Being a power of two it costs no digit itself.
 *
 * @param size root mean square of a series
 * @returns the divisor; 1 for a series of zeros or without values
 */
export function powerOfTwoNear(size: number): number {
  const power = 2 ** Math.round(Math.log2(size));
  return power > 0 && Number.isFinite(power) ? power : 1;
}

/**
 * Spectra of two real series of the same length from one complex transform of a + i b.
 *
 * @param a real series, n values without NaN (not changed)
 * @param b real series, n values without NaN (not changed); of about the size of a (`powerOfTwoNear`)
 * @returns half spectra of a and b, ⌊n/2⌋ + 1 values each
 */
export function transformTwoReal(a: Float64Array, b: Float64Array): [HalfSpectrum, HalfSpectrum] {
  const n = a.length;
  if (b.length !== n)
    throw new RangeError(`Two series of ${n} and ${b.length} values cannot share a transform`);
  const re = Float64Array.from(a);
  const im = Float64Array.from(b);
  sharedFft(n).forward(re, im);
  const half = (n >> 1) + 1;
  const first = { re: new Float64Array(half), im: new Float64Array(half) };
  const second = { re: new Float64Array(half), im: new Float64Array(half) };
  for (let k = 0; k < half; k++) {
    const mirror = k === 0 ? 0 : n - k;
    first.re[k] = 0.5 * (re[k] + re[mirror]);
    first.im[k] = 0.5 * (im[k] - im[mirror]);
    second.re[k] = 0.5 * (im[k] + im[mirror]);
    second.im[k] = 0.5 * (re[mirror] - re[k]);
  }
  return [first, second];
}

/**
 * Spectrum of one real series.
 *
 * @param x real series, n values without NaN (not changed)
 * @returns half spectrum, ⌊n/2⌋ + 1 values
 */
export function transformReal(x: Float64Array): HalfSpectrum {
  const n = x.length;
  const half = (n >> 1) + 1;
  if (n % 2 === 1) {
    const re = Float64Array.from(x);
    const im = new Float64Array(n);
    sharedFft(n).forward(re, im);
    return { re: re.slice(0, half), im: im.slice(0, half) };
  }
  // Even and odd samples as real and imaginary part of a transform of half the length, then one more butterfly.
  const m = n >> 1;
  const re = new Float64Array(m);
  const im = new Float64Array(m);
  for (let j = 0; j < m; j++) {
    re[j] = x[2 * j];
    im[j] = x[2 * j + 1];
  }
  sharedFft(m).forward(re, im);
  const out = { re: new Float64Array(half), im: new Float64Array(half) };
  for (let k = 0; k < half; k++) {
    const here = k === m ? 0 : k;
    const mirror = here === 0 ? 0 : m - here;
    const evenRe = 0.5 * (re[here] + re[mirror]);
    const evenIm = 0.5 * (im[here] - im[mirror]);
    const oddRe = 0.5 * (im[here] + im[mirror]);
    const oddIm = 0.5 * (re[mirror] - re[here]);
    const angle = (-2 * Math.PI * k) / n;
    const c = Math.cos(angle);
    const s = Math.sin(angle);
    out.re[k] = evenRe + oddRe * c - oddIm * s;
    out.im[k] = evenIm + oddRe * s + oddIm * c;
  }
  return out;
}

/**
 * Real series of a half spectrum (inverse of `transformReal`).
 *
 * @param spectrum ⌊n/2⌋ + 1 values
 * @param n length of the series
 */
export function seriesOfHalfSpectrum(spectrum: HalfSpectrum, n: number): Float64Array {
  const half = (n >> 1) + 1;
  if (spectrum.re.length !== half)
    throw new RangeError(`A series of ${n} values has ${half} spectral values, not ${spectrum.re.length}`);
  const re = new Float64Array(n);
  const im = new Float64Array(n);
  for (let k = 0; k < half; k++) {
    re[k] = spectrum.re[k];
    im[k] = spectrum.im[k];
    if (k > 0 && k < n - k) {
      re[n - k] = spectrum.re[k];
      im[n - k] = -spectrum.im[k];
    }
  }
  // The mean and, for even n, the highest frequency of a real series carry no phase.
  im[0] = 0;
  if (n % 2 === 0) im[n >> 1] = 0;
  sharedFft(n).inverse(re, im);
  return re;
}
