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

/**
 * A value in the viewer's unit, with as many decimals as its unit deserves.
 * @param {number|null} value SI @param {string} unit of the protocol @param {import('./units.js').UnitChoice} choice
 */
export function valueText(value, unit, choice) {
  if (value === null) return 'unknown';
  if (unit === 'N') return `${fixed(value * unitOf(choice, 'force').per_si, choice.force === 'kN' ? 2 : 0)} ${choice.force}`;
  if (unit === 'm/s') return `${fixed(value * unitOf(choice, 'speed').per_si, 1)} ${choice.speed}`;
  if (unit === 'm' && Math.abs(value) < 1) return `${fixed(value * 1000, 1)} mm`;
  if (unit === 'Pa') return Math.abs(value) >= 1e5 ? `${fixed(value / 1e5, 2)} bar` : `${fixed(value, 0)} Pa`;
  if (unit === 'K') return `${fixed(value - 273.15, 1)} °C`;
  return `${fixed(value, Math.abs(value) < 100 ? 2 : 0)}${unit && unit !== '-' ? ` ${unit}` : ''}`;
}

/**
 * The innovation over its gate as a place on a rule from -1.5 to 1.5: beyond the ends of the middle part it is refused.
 * @param {ChannelHealth} h
 */
export function gateRule(h) {
  if (h.test_ratio === null || h.innovation === null) return html('span', {class: 'quiet'}, 'not compared');
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
  return html(
    'tr',
    {class: `sensor sensor-${h.trust}`},
    html('th', {scope: 'row'}, h.name),
    html('td', {}, icon(h.trust === 'absent' ? 'unknown' : h.trust), storyText(h)),
    html('td', {}, gateRule(h)),
    html('td', {class: 'number'}, valueText(h.value, unit, choice)),
    html('td', {class: 'number'}, h.rate_hz === null ? '–' : fixed(h.rate_hz, h.rate_hz < 10 ? 1 : 0)),
    html('td', {class: 'number'}, fixed(h.gaps, 0)),
    html('td', {class: 'number', title: `gate ${h.gated}, out of range ${h.out_of_range}, not finite ${h.not_finite}, repeated ${h.repeats}`}, fixed(h.gated + h.out_of_range + h.not_finite, 0)),
  );
}

/** @param {string} caption */
export function sensorTable(caption) {
  const rows = html('tbody');
  const table = html('table', {class: 'sensor-table'}, html('caption', {class: 'aloud'}, caption), html('thead', {}, html('tr', {}, ...HEADINGS.map((h) => html('th', {scope: 'col', class: NUMBERS.includes(h) ? 'number' : null}, h)))), rows);
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
