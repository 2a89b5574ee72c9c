// SPDX-License-Identifier: MIT
// What is usual for this car in one braking zone, out of its earlier closings that were not slow.

/** @typedef {import('./protocol.js').Closure} Closure */
/** @typedef {import('./outing.js').Outing} Outing */

/** Fewer closings than this make no usual. */
export const LEAST_FOR_USUAL = 3;

/** Quantile of sorted values, linear between neighbours. @param {number[]} sorted @param {number} q */
export function quantile(sorted, q) {
  const at = (sorted.length - 1) * q;
  const below = Math.floor(at);
  const above = Math.min(below + 1, sorted.length - 1);
  return sorted[below] + (sorted[above] - sorted[below]) * (at - below);
}

/** @param {number[]} values */
function ascending(values) {
  return [...values].sort((a, b) => a - b);
}

/**
 * Earlier closings of the zone that were not slow; all zones where `zone` is null.
 * @param {Outing} outing @param {number|null} zone @param {number} before number of the closing that is looked at
 */
export function earlierUsual(outing, zone, before) {
  return outing
    .closuresInOrder()
    .filter((c) => c.number < before && !c.slow && c.t95 !== null && (zone === null || c.zone === zone));
}

/**
 * @typedef {object} UsualBand
 * @property {number} count closings that it is made of
 * @property {number[]} t empty where there are too few
 * @property {number[]} low tenth of the closings' medians
 * @property {number[]} middle
 * @property {number[]} high
 */

/**
 * The band of the zone's usual closings: at each instant the 10 %, 50 % and 90 % quantiles of their final curves.
 * @param {Outing} outing @param {number} zone @param {number} before @returns {UsualBand}
 */
export function usualBand(outing, zone, before) {
  const curves = earlierUsual(outing, zone, before)
    .map((c) => outing.regrowths.get(c.number))
    .filter((r) => r !== undefined && r.final && r.shut);
  /** @type {UsualBand} */
  const band = {count: curves.length, t: [], low: [], middle: [], high: []};
  if (zone === 0 || curves.length < LEAST_FOR_USUAL) return band;
  const first = /** @type {import('./protocol.js').Regrowth} */ (curves[0]);
  first.t.forEach((t, i) => {
    const shares = ascending(curves.map((curve) => curve?.share[i] ?? NaN).filter(Number.isFinite));
    if (shares.length < LEAST_FOR_USUAL) return;
    band.t.push(t);
    band.low.push(quantile(shares, 0.1));
    band.middle.push(quantile(shares, 0.5));
    band.high.push(quantile(shares, 0.9));
  });
  return band;
}

/**
 * The zone's usual margin: 10 %, 50 %, 90 % quantiles over its closings that were not slow.
 * @param {Closure[]} closures of the zone @returns {{low: number, middle: number, high: number}|null}
 */
export function usualMargin(closures) {
  const margins = ascending(closures.filter((c) => !c.slow && c.margin).map((c) => /** @type {any} */ (c.margin)[0]));
  if (margins.length < LEAST_FOR_USUAL) return null;
  return {low: quantile(margins, 0.1), middle: quantile(margins, 0.5), high: quantile(margins, 0.9)};
}

/**
 * How many times its usual a closing took, in chords, so that speed is out of it: against the zone's own earlier
 * closings, or, where those are too few, against the earlier ones of every zone.
 * @param {Outing} outing @param {Closure} closure
 * @returns {{factor: number, sd: number, of: "zone"|"car", count: number}|null}
 */
export function timesUsual(outing, closure) {
  if (closure.chords === null || closure.t95 === null) return null;
  for (const of of /** @type {const} */ (['zone', 'car'])) {
    if (of === 'zone' && closure.zone === 0) continue;
    const earlier = earlierUsual(outing, of === 'zone' ? closure.zone : null, closure.number);
    const chords = ascending(earlier.map((c) => c.chords).filter((x) => x !== null));
    if (chords.length < LEAST_FOR_USUAL) continue;
    const usual = quantile(chords, 0.5);
    const factor = closure.chords / usual;
    // The interval's width gives the closing's own uncertainty; the median's is 1.25 sd / sqrt(n) of a normal sample.
    const own = logSd(closure);
    const spread = standardDeviation(chords.map((c) => Math.log(c / usual)));
    return {factor, sd: factor * Math.hypot(own, (1.25 * spread) / Math.sqrt(chords.length)), of, count: chords.length};
  }
  return null;
}

/** Standard uncertainty of ln t95 from its 95 % interval. @param {Closure} c */
function logSd(c) {
  if (!c.t95_low || !c.t95_high || c.t95_low <= 0) return 0;
  return Math.log(c.t95_high / c.t95_low) / (2 * 1.96);
}

/** @param {number[]} values */
function standardDeviation(values) {
  const mean = values.reduce((sum, v) => sum + v, 0) / values.length;
  return Math.sqrt(values.reduce((sum, v) => sum + (v - mean) ** 2, 0) / Math.max(1, values.length - 1));
}
