// SPDX-License-Identifier: MIT
// Sensors: for each channel its innovation against the gate, rate, gaps, last value, and since when and why it is
// distrusted.
import {html, svg} from "./svg.js";
import {icon} from "./marks.js";
import {fixed, clock, unitOf} from "./units.js";
import {FAULT_WORDS} from "./words.js";

/** @typedef {import('./protocol.js').ChannelHealth} ChannelHealth */

const HEADINGS = ['Channel', 'Trust', 'Innovation / gate', 'Last value', 'Rate, Hz', 'Gaps', 'Refused'];
const NUMBERS = ['Last value', 'Rate, Hz', 'Gaps', 'Refused'];

/** Distrusted first, absent last, else as the program lists them. @param {ChannelHealth[]} health */
export function sensorOrder(health) {
  const rank = {distrusted: 0, good: 1, absent: 2};
  return [...health].sort((a, b) => rank[a.trust] - rank[b.trust]);
}

/** Channels that have a unit and decimals of their own. @type {Record<string, (value: number) => string>} */
const OWN_UNIT = {
  flap_position: percentOf,
  flap_command: percentOf,
  throttle: percentOf,
  relative_humidity: percentOf,
  lap: (value) => fixed(value, 0),
  brake_pressure: (value) => `${fixed(value / 1e5, 1)} bar`,
  air_pressure: (value) => `${fixed(value / 100, 0)} hPa`,
};

/** @param {number} value */
function percentOf(value) {
  return `${fixed(value * 100, 0)} %`;
}

/**
 * A value in the viewer's unit, with as many decimals as its unit deserves.
 * @param {string} name of the channel @param {number|null} value SI @param {string} unit of the protocol
 * @param {import('./units.js').UnitChoice} choice
 */
export function valueText(name, value, unit, choice) {
  if (value === null) return 'unknown';
  const own = OWN_UNIT[name];
  if (own) return own(value);
  if (unit === 'N') return `${fixed(value * unitOf(choice, 'force').per_si, choice.force === 'kN' ? 2 : 0)} ${choice.force}`;
  if (unit === 'm/s') return `${fixed(value * unitOf(choice, 'speed').per_si, 1)} ${choice.speed}`;
  if (unit === 'm' && name.startsWith('ride_height')) return `${fixed(value * 1000, 1)} mm`;
  if (unit === 'm' || unit === 'Pa') return `${fixed(value, 0)} ${unit}`;
  if (unit === 'K') return `${fixed(value - 273.15, 1)} °C`;
  if (unit === 'rad') return `${fixed((value * 180) / Math.PI, 1)}°`;
  return `${fixed(value, 2)}${unit && unit !== '-' ? ` ${unit.replace('^2', '²')}` : ''}`;
}

// The filter foretells these, and holds them against what comes.
const FORETOLD = /^(speed|accel_z|ride_height_.*)$/;
// These move the filter from one instant to the next.
const INPUTS = /^(load_.*|accel_.*|drive_force|flap_.*|pitot_pressure|heading|yaw_rate|air_.*|relative_humidity)$/;

/** Why a channel has no innovation. @param {string} name @returns {[string, string]} a word, and a sentence for who asks */
export function uncompared(name) {
  if (FORETOLD.test(name)) return ['not yet', 'nothing has been foretold for it yet'];
  if (INPUTS.test(name)) return ['input', 'an input of the filter, so nothing foretells it: it is watched for spikes, standing still and being at odds with other channels'];
  return ['as it comes', 'marks events and places; it is watched for gaps and for values that cannot be'];
}

/**
 * The innovation over its gate as a place on a rule from -1.5 to 1.5: beyond the ends of the middle part it is refused.
 * @param {ChannelHealth} h
 */
export function gateRule(h) {
  if (h.test_ratio === null || h.innovation === null) {
    const [word, why] = uncompared(h.name);
    return html('span', {class: 'quiet', title: why}, word);
  }
  const root = svg('svg', {class: 'gate', viewBox: '-60 -8 120 16', role: 'img', 'aria-label': `${fixed(Math.sign(h.innovation) * Math.sqrt(h.test_ratio), 2)} of the gate`});
  root.append(svg('rect', {class: 'gate-inside', x: -40, y: -5, width: 80, height: 10}));
  root.append(svg('path', {class: 'gate-ends', d: 'M-40-7V7M40-7V7M0-5V5'}));
  const at = Math.max(-1.45, Math.min(1.45, Math.sign(h.innovation) * Math.sqrt(h.test_ratio)));
  const refused = Math.abs(at) > 1;
  root.append(svg('path', {class: refused ? 'gate-refused' : 'gate-used', d: refused ? 'M-5-5L5 5M-5 5L5-5' : 'M-4 0A4 4 0 1 0 4 0A4 4 0 1 0-4 0Z', transform: `translate(${(at * 40).toFixed(1)} 0)`}));
  return root;
}

/** Trust, and what gave the channel away since when. @param {ChannelHealth} h */
function storyText(h) {
  if (h.trust === 'absent') return 'not in this log';
  if (h.trust === 'good') return h.fault === 'none' ? 'good' : `good, ${FAULT_WORDS[h.fault]}`;
  const what = FAULT_WORDS[h.fault];
  return ['distrusted', what, h.since === null ? '' : `since ${clock(h.since)}`].filter(Boolean).join(', ');
}

/** Cells of a channel's row, heading first. @param {ChannelHealth} h @param {string} unit @param {import('./units.js').UnitChoice} choice */
export function sensorRow(h, unit, choice) {
  const cell = (/** @type {string} */ kind, /** @type {string} */ name, /** @type {(Node|string)[]} */ ...content) => html('td', {role: 'cell', class: kind, 'data-name': name || null}, ...content);
  const refused = fixed(h.gated + h.out_of_range + h.not_finite, 0);
  return html(
    'tr',
    {role: 'row', class: `sensor sensor-${h.trust}`},
    html('th', {role: 'rowheader', scope: 'row'}, h.name),
    cell('sensor-story', '', icon(h.trust === 'absent' ? 'unknown' : h.trust), storyText(h)),
    cell('sensor-gate', '', gateRule(h)),
    cell('number sensor-value', '', valueText(h.name, h.value, unit, choice)),
    cell('number sensor-count', 'Hz', h.rate_hz === null ? '–' : fixed(h.rate_hz, h.rate_hz < 10 ? 1 : 0)),
    cell('number sensor-count', 'gaps', fixed(h.gaps, 0)),
    cell('number sensor-count', 'refused', html('span', {title: `gate ${h.gated}, out of range ${h.out_of_range}, not finite ${h.not_finite}, repeated ${h.repeats}`}, refused)),
  );
}

/** On a phone each row becomes a card; the roles keep the table one for screen readers. @param {string} caption */
export function sensorTable(caption) {
  const rows = html('tbody', {role: 'rowgroup'});
  const head = html('tr', {role: 'row'}, ...HEADINGS.map((h) => html('th', {role: 'columnheader', scope: 'col', class: NUMBERS.includes(h) ? 'number' : null}, h)));
  const table = html('table', {class: 'sensor-table', role: 'table'}, html('caption', {class: 'aloud'}, caption), html('thead', {role: 'rowgroup'}, head), rows);
  return {table, rows};
}

/** @param {import('./wall.js').Wall} wall @param {HTMLElement} root @returns {import('./wall.js').Part} */
export function sensorsPart(wall, root) {
  const {table, rows} = sensorTable('Health of each channel');
  const empty = html('p', {class: 'empty'}, 'No word of the sensors yet.');
  root.append(empty, html('div', {class: 'table-frame', tabindex: 0, role: 'region', 'aria-label': 'Table of the sensors'}, table));

  function draw() {
    const {health, hello} = wall.outing;
    empty.hidden = health.length > 0;
    table.hidden = health.length === 0;
    const units = new Map((hello?.channels ?? []).map((c) => [c.name, c.unit]));
    rows.replaceChildren(...sensorOrder(health).map((h) => sensorRow(h, units.get(h.name) ?? '', wall.preferences.units)));
  }

  return {needs: ['hello', 'health', 'preferences'], least_ms: 250, draw};
}
