// SPDX-License-Identifier: MIT
// Curves that come as points, made smooth for the eye: a cubic through every point that never leaves the range between
// two neighbours (F. N. Fritsch and J. Butland, SIAM J. Sci. Stat. Comput. 5 (1984) 300; memory). No point is moved.

/** Slopes at the points; 0 where the curve turns. @param {number[]} x @param {number[]} y */
function slopes(x, y) {
  const step = (/** @type {number} */ i) => x[i + 1] - x[i];
  const secant = (/** @type {number} */ i) => (y[i + 1] - y[i]) / step(i);
  return x.map((_, i) => {
    if (i === 0 || i === x.length - 1) return 0;
    const [before, after] = [secant(i - 1), secant(i)];
    if (!(before * after > 0)) return 0;
    const weight = (step(i - 1) + 2 * step(i)) / (3 * (step(i - 1) + step(i)));
    return (before * after) / (weight * after + (1 - weight) * before);
  });
}

/** The cubic between points i and i + 1. @param {number[]} x @param {number[]} y @param {number[]} slope @param {number} i @param {number} t */
function between(x, y, slope, i, t) {
  const h = x[i + 1] - x[i];
  const s = (t - x[i]) / h;
  return y[i] * (1 + 2 * s) * (1 - s) ** 2 + y[i + 1] * s * s * (3 - 2 * s) + h * s * (1 - s) * (slope[i] * (1 - s) - slope[i + 1] * s);
}

/** Value of the curve at t, NaN beyond its ends. @param {number[]} x rising @param {number[]} y @param {number} t */
export function valueAt(x, y, t) {
  const i = x.findIndex((at) => at >= t);
  if (i < 0) return NaN;
  if (x[i] === t) return y[i];
  return i === 0 ? NaN : between(x, y, slopes(x, y), i - 1, t);
}

/** The first place where the curve reaches a level, NaN where it does not. @param {number[]} x @param {number[]} y @param {number} level */
export function reaches(x, y, level) {
  const i = y.findIndex((value) => value >= level);
  if (i < 0) return NaN;
  if (i === 0) return y[0] === level ? x[0] : NaN;
  const slope = slopes(x, y);
  let [low, high] = [x[i - 1], x[i]];
  for (let k = 0; k < 30; k += 1) {
    const middle = (low + high) / 2;
    if (between(x, y, slope, i - 1, middle) < level) low = middle;
    else high = middle;
  }
  return high;
}

/** `parts` pieces for each of the curve's own. @param {number[]} x @param {number} parts */
export function finer(x, parts) {
  return x.flatMap((at, i) => (i === x.length - 1 ? [at] : Array.from({length: parts}, (_, k) => at + ((x[i + 1] - at) * k) / parts)));
}

/** The curve's values at finer(x, parts). @param {number[]} x @param {number[]} y @param {number} parts */
export function finerValues(x, y, parts) {
  const slope = slopes(x, y);
  return finer(x, parts).map((t, k) => {
    const i = Math.min(Math.floor(k / parts), x.length - 2);
    return between(x, y, slope, i, t);
  });
}
