// SPDX-License-Identifier: MIT
// What is usual for this car, out of its earlier closings that were not slow. One rule for all that is shown of it: the
// mean of the zone's own, with the spread within the zones pooled over all of them; where that is not known yet, mean
// and spread over every zone. A band of what is usual holds eight of ten closings to come (Student's t), so that it is
// wide while they are few.
import {reaches} from "./curve.js";

/** @typedef {import('./protocol.js').Closure} Closure */
/** @typedef {import('./outing.js').Outing} Outing */

/** Fewer closings than this make no usual. */
export const LEAST_FOR_USUAL = 3;
const LEAST_FREEDOM = 2; // one pair tells hardly anything of a spread
const SHARES = [0.02, 0.05, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.95, 0.98];

/** Student's t that one of ten exceeds (Abramowitz and Stegun 26.7.5; memory). @param {number} freedom */
export function studentTenth(freedom) {
  const z = 1.2815516;
  const terms = [(z ** 3 + z) / 4, (5 * z ** 5 + 16 * z ** 3 + 3 * z) / 96, (3 * z ** 7 + 19 * z ** 5 + 17 * z ** 3 - 15 * z) / 384];
  return terms.reduce((sum, term, k) => sum + term / freedom ** (k + 1), z);
}

/**
 * @typedef {object} Usual
 * @property {number} middle
 * @property {number} sd of the middle
 * @property {number} half width to either side that holds eight of ten to come
 * @property {number} count values that the middle is made of
 * @property {"zone"|"car"} of
 */

/** @param {{zone: number, value: number}[]} values @param {number} zone @returns {Usual|null} null: not known yet */
export function usualOf(values, zone) {
  /** @type {Map<number, number[]>} */
  const zones = new Map();
  for (const v of values) zones.set(v.zone, [...(zones.get(v.zone) ?? []), v.value]);
  const within = [...zones.values()].map((group) => ({freedom: group.length - 1, squares: squaresOf(group)}));
  const freedom = within.reduce((sum, g) => sum + g.freedom, 0);
  const here = zone > 0 ? zones.get(zone) ?? [] : [];
  if (here.length > 0 && freedom >= LEAST_FREEDOM) {
    return usual(here, within.reduce((sum, g) => sum + g.squares, 0), freedom, 'zone');
  }
  const all = values.map((v) => v.value);
  return all.length >= LEAST_FOR_USUAL ? usual(all, squaresOf(all), all.length - 1, 'car') : null;
}

/** @param {number[]} values @param {number} squares @param {number} freedom @param {"zone"|"car"} of @returns {Usual} */
function usual(values, squares, freedom, of) {
  const spread = Math.sqrt(squares / freedom);
  const count = values.length;
  return {middle: meanOf(values), sd: spread / Math.sqrt(count), half: studentTenth(freedom) * spread * Math.sqrt(1 + 1 / count), count, of};
}

/** @param {number[]} values */
function meanOf(values) {
  return values.reduce((sum, v) => sum + v, 0) / values.length;
}

/** @param {number[]} values */
function squaresOf(values) {
  const mean = meanOf(values);
  return values.reduce((sum, v) => sum + (v - mean) ** 2, 0);
}

/** Closings before number `before` that came back whole and were not slow. @param {Outing} outing @param {number} before */
export function earlierUsual(outing, before) {
  return outing.closuresInOrder().filter((c) => c.number < before && !c.slow && c.t95 !== null);
}

/**
 * @typedef {object} UsualBand
 * @property {number} count closings that its middle is made of
 * @property {"zone"|"car"} of
 * @property {number[]} share levels of the flap's downforce; empty where the usual is not known yet
 * @property {number[]} early time after shut, s, at which it is reached
 * @property {number[]} middle
 * @property {number[]} late
 */

/**
 * The band of usual closings: when each share of the flap's downforce is usually back. Closings are compared in chords
 * of travel, so that speed is out of it.
 * @param {Outing} outing @param {number} zone @param {number} before @param {number} chord_time s of the closing looked at
 * @returns {UsualBand}
 */
export function usualBand(outing, zone, before, chord_time) {
  const curves = earlierUsual(outing, before).flatMap((c) => {
    const curve = outing.regrowths.get(c.number);
    return curve && curve.final && curve.shut && curve.chord_time > 0 ? [{zone: c.zone, chords: chordsOf(curve)}] : [];
  });
  /** @type {UsualBand} */
  const band = {count: curves.length, of: 'car', share: [], early: [], middle: [], late: []};
  SHARES.forEach((level, k) => {
    const values = curves.map((c) => ({zone: c.zone, value: c.chords[k]})).filter((v) => Number.isFinite(v.value));
    const at = usualOf(values, zone);
    if (!at) return;
    band.of = at.of;
    band.count = at.count;
    band.share.push(level);
    band.early.push((at.middle - at.half) * chord_time);
    band.middle.push(at.middle * chord_time);
    band.late.push((at.middle + at.half) * chord_time);
  });
  return band;
}

/** "usual here (2 earlier)": what a band stands for. @param {UsualBand} band */
export function usualWords(band) {
  if (band.share.length === 0) return `usual not known yet (${band.count} of ${LEAST_FOR_USUAL} closings)`;
  return band.of === 'zone' ? `usual here (${band.count} earlier)` : `usual in all zones (${band.count} earlier)`;
}

/** @type {WeakMap<import('./protocol.js').Regrowth, number[]>} */
const reached = new WeakMap();

/** Chords of travel until each of SHARES was back. @param {import('./protocol.js').Regrowth} curve of a judged closing */
function chordsOf(curve) {
  const known = reached.get(curve) ?? SHARES.map((level) => reaches(curve.t, curve.share, level) / curve.chord_time);
  reached.set(curve, known);
  return known;
}

/** Where the margin of the zone's next usual closing lies. @param {Outing} outing @param {number} zone @param {number} before @returns {Usual|null} */
export function usualMargin(outing, zone, before) {
  const values = earlierUsual(outing, before).flatMap((c) => (c.margin && c.zone > 0 ? [{zone: c.zone, value: c.margin[0]}] : []));
  const found = usualOf(values, zone);
  return found?.of === 'zone' ? found : null; // another zone's brakes say nothing of this one's
}

/**
 * How many times its usual a closing took, in chords.
 * @param {Outing} outing @param {Closure} closure @param {number} before usual by the closings before this number
 * @returns {{factor: number, sd: number, of: "zone"|"car", count: number}|null}
 */
export function timesUsual(outing, closure, before) {
  if (closure.chords === null || closure.t95 === null || closure.chords <= 0) return null;
  const values = earlierUsual(outing, before).flatMap((c) => (c.chords !== null && c.chords > 0 ? [{zone: c.zone, value: Math.log(c.chords)}] : []));
  const found = usualOf(values, closure.zone);
  if (!found) return null;
  const factor = Math.exp(Math.log(closure.chords) - found.middle);
  return {factor, sd: factor * Math.hypot(logSd(closure), found.sd), of: found.of, count: found.count};
}

/** Standard uncertainty of ln t95 from its 95 % interval. @param {Closure} c */
function logSd(c) {
  if (!c.t95_low || !c.t95_high || c.t95_low <= 0) return 0;
  return Math.log(c.t95_high / c.t95_low) / (2 * 1.96);
}
