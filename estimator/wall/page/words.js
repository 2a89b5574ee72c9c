// SPDX-License-Identifier: MIT
// What the page says, as plain words and the name of a mark (marks.js) for each. No drawing.
import {fixed, plusMinus, quantityText, span, clock, msRange} from "./units.js";
import {timesUsual} from "./usual.js";

/** @typedef {import('./protocol.js').Closure} Closure */
/** @typedef {import('./protocol.js').ChannelHealth} ChannelHealth */
/** @typedef {import('./outing.js').Outing} Outing */
/** @typedef {import('./units.js').UnitChoice} UnitChoice */

/**
 * @typedef {object} Answer
 * @property {"full"|"short"|"unclear"|"unknown"|"slow"|"usual"|"good"|"distrusted"|"growing"} mark
 * @property {string} word what is read from two metres
 * @property {string} detail
 */

/** Is the flow back? @param {Closure} c @param {UnitChoice} units @returns {Answer} */
export function flowAnswer(c, units) {
  if (c.verdict === null) {
    if (c.tau === null && c.t95 === null) return {mark: 'unknown', word: 'Unknown', detail: 'data were missing; no braking followed'};
    return {
      mark: c.whole ? 'full' : 'unclear',
      word: c.whole ? 'Back, no braking' : `Settles at ${percent(c.plateau)}`,
      detail: c.t95 !== null ? `95 % back ${span(c.t95)} after shut` : 'no braking followed',
    };
  }
  const missing = c.shortfall ? `${quantityText(c.shortfall, units, 'force')} missing` : 'missing downforce unknown';
  const spare = c.margin ? `; ${marginText(c.margin)}` : '';
  const words = {full: 'Back in time', short: 'Short at the brakes', unclear: 'Unclear'};
  return {mark: c.verdict, word: words[c.verdict], detail: missing + spare};
}

/** @param {import('./protocol.js').Quantity} margin */
export function marginText(margin) {
  const [value, sd] = margin;
  return `${plusMinus(Math.abs(value) * 1000, sd * 1000, 0)} ms ${value >= 0 ? 'to spare' : 'too late'}`;
}

/** Slower than usual? @param {Outing} outing @param {Closure} c @returns {Answer} */
export function paceAnswer(outing, c) {
  if (!c.whole && c.plateau !== null) {
    return {mark: 'slow', word: `Settles at ${percent(c.plateau)}`, detail: 'part of the flow stays detached'};
  }
  if (c.t95 === null) return {mark: 'unknown', word: 'Unknown', detail: 'the data could not tell'};
  const back = `back in ${span(c.t95)}${intervalText(c)}`;
  const times = timesUsual(outing, c, c.number);
  const factor = times ? `${plusMinus(times.factor, times.sd, 1)} × ${times.of === 'zone' ? 'this zone’s' : 'the car’s'} usual` : '';
  if (c.slow) return {mark: 'slow', word: times ? `Slow: ${fixed(times.factor, 1)} × usual` : 'Slow', detail: times ? `${factor}; ${back}` : back};
  if (!c.usual_known) return {mark: 'unknown', word: 'Not known yet', detail: `too few closings; ${back}`};
  return {mark: 'usual', word: 'Usual pace', detail: times ? `${factor}; ${back}` : back};
}

/** @param {Closure} c */
function intervalText(c) {
  if (c.t95_low === null || c.t95_high === null) return '';
  return ` (${msRange(c.t95_low, c.t95_high)})`;
}

/** @param {number|null} share */
export function percent(share) {
  return share === null ? 'unknown' : `${fixed(share * 100, 0)} %`;
}

/** What is wrong with the sensors? @param {ChannelHealth[]} health @returns {Answer} */
export function sensorAnswer(health) {
  const present = health.filter((h) => h.trust !== 'absent');
  if (present.length === 0) return {mark: 'unknown', word: 'Unknown', detail: 'no word of the sensors yet'};
  const bad = present.filter((h) => h.trust === 'distrusted');
  if (bad.length === 0) return {mark: 'good', word: 'All trusted', detail: `${present.length} channels`};
  return {
    mark: 'distrusted',
    word: bad.length === 1 ? `${bad[0].name}` : `${bad.length} distrusted`,
    detail: bad.map((h) => (bad.length === 1 ? '' : `${h.name} `) + `${FAULT_WORDS[h.fault]}, since ${clock(h.since ?? NaN)}`).join('; '),
  };
}

/** What gave a channel away. @type {Record<string, string>} */
export const FAULT_WORDS = {
  none: '',
  gone: 'stopped coming',
  stuck: 'stands still',
  jumped: 'jumped',
  drifting: 'drifts away',
  noisy: 'is too noisy',
  disagrees: 'disagrees with the others',
};

/** Severity as a word of what to do. @type {Record<string, {word: string, rank: number}>} */
export const SEVERITIES = {
  high: {word: 'Act', rank: 0},
  medium: {word: 'Look', rank: 1},
  low: {word: 'Note', rank: 2},
};

/** Why the estimate of now is not to be relied on, most telling first. @type {[string, string][]} */
const REASONS = [
  ['stale', 'needed data stopped coming'],
  ['not_converged', 'too little seen yet'],
];

/** Remarks beside values that stand. @type {[string, string][]} */
const REMARKS = [
  ['slow', 'held: too slow for the air to show'],
  ['sensor_distrusted', 'a sensor is left out'],
  ['reattaching', 'a closing is being judged'],
  ['flap_open', 'flap open'],
  ['ground_reference', 'refers to speed over ground: wind is in it'],
  ['standard_air', 'standard atmosphere assumed'],
];

/** Why now is unknown, or null where it is known. @param {string[]} flags @returns {string|null} */
export function unknownReason(flags) {
  return REASONS.find(([flag]) => flags.includes(flag))?.[1] ?? null;
}

/** @param {string[]} flags */
export function remarks(flags) {
  return REMARKS.filter(([flag]) => flags.includes(flag)).map(([, words]) => words);
}

/** @param {Closure} c "closing 6, lap 3, zone 1" */
export function closingName(c) {
  return `closing ${c.number}, lap ${c.lap}, ${c.zone ? `zone ${c.zone}` : 'no zone'}`;
}
