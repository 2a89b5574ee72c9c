// SPDX-License-Identifier: MIT
// The report's tables: alarms, areas, sensors, settings.
import {html} from "./svg.js";
import {icon} from "./marks.js";
import {clock, fixed, plusMinus, speedText, unitOf} from "./units.js";
import {SEVERITIES} from "./words.js";
import {sensorTable, sensorRow, sensorOrder} from "./sensors_part.js";
import {areasBySpeed} from "./area_table.js";
import {factList} from "./report_data.js";

/** @typedef {import('./protocol.js').Quantity} Quantity */
/** @typedef {import('./outing.js').Outing} Outing */
/** @typedef {import('./units.js').UnitChoice} UnitChoice */

/**
 * On a phone each row becomes a card, so cells carry their heading; the roles keep the table one for screen readers.
 * @param {string} name @param {string[]} headings @param {(Node|string)[][]} rows
 * @param {number} words columns at the left that are words
 */
export function table(name, headings, rows, words) {
  const kind = (/** @type {number} */ i) => ({class: i < words ? null : 'number'});
  const head = html('tr', {role: 'row'}, ...headings.map((h, i) => html('th', {scope: 'col', role: 'columnheader', ...kind(i)}, h)));
  const body = rows.map((row) => html('tr', {role: 'row'}, ...row.map((value, i) => html('td', {role: 'cell', 'data-name': headings[i], ...kind(i)}, value))));
  return html('table', {class: 'cards', role: 'table', 'aria-label': name}, html('thead', {role: 'rowgroup'}, head), html('tbody', {role: 'rowgroup'}, ...body));
}

/** @param {Outing} outing */
export function alarmsSection(outing) {
  const alarms = [...outing.alarms.values()].sort((a, b) => a.t - b.t);
  const state = (/** @type {import('./protocol.js').Alarm} */ a) => `${a.acknowledged ? 'acknowledged' : 'not acknowledged'}${a.times > 1 ? `, came ${a.times} times` : ''}${a.active ? ', still so at the end' : ''}`;
  const rows = alarms.map((a) => [html('span', {}, icon(a.severity), ` ${SEVERITIES[a.severity].word}`), clock(a.t), a.text, state(a)]);
  return html('section', {id: 'alarms'}, html('h2', {}, 'Alarms'), rows.length ? table('Alarms', ['To do', 'At', 'What', 'Became'], rows, 4) : html('p', {}, 'None.'));
}

/** @param {Quantity|null} q @param {UnitChoice} units */
function area(q, units) {
  const {per_si} = unitOf(units, 'area');
  return q === null ? '–' : plusMinus(q[0] * per_si, q[1] * per_si, 3);
}

/** @param {Outing} outing @param {UnitChoice} units */
export function areasSection(outing, units) {
  const unit = unitOf(units, 'area').word;
  const headings = ['Flap', 'Speed', `Downforce front, ${unit}`, `Downforce rear, ${unit}`, `Drag, ${unit}`, 'Estimates'];
  /** @type {string[][]} */
  const rows = [];
  const summary = outing.end?.summary?.areas;
  if (summary) {
    for (const [state, key] of [['shut', 'flap_closed'], ['open', 'flap_open']]) {
      const of = (/** @type {string} */ name) => summary[key][name];
      const pair = (/** @type {string} */ name) => area(of(name).value === null ? null : [of(name).value, of(name).sd], units);
      rows.push([state, `over ${speedText(50, units)}`, pair('cla_front'), pair('cla_rear'), pair('cda'), fixed(of('cla_rear').estimates, 0)]);
    }
  }
  for (const row of areasBySpeed(outing.series)) {
    const speeds = `${fixed(row.from * unitOf(units, 'speed').per_si, 0)} to ${speedText(row.to, units).replace(/\.0 /, ' ')}`;
    rows.push([row.flap, speeds, ...row.areas.map((q) => area(q, units)), fixed(row.rows, 0)]);
  }
  const note = 'Coefficient times area, steady flow only. By speed: from the rows at 10 Hz. Neighbouring estimates share their errors, so ± does not fall with their number.';
  return html('section', {id: 'areas'}, html('h2', {}, 'Areas by flap and speed'), rows.length ? table('Areas', headings, rows, 2) : html('p', {}, 'None: no steady flow was seen.'), html('p', {class: 'quiet'}, note));
}

/** @param {Outing} outing @param {UnitChoice} units */
export function sensorsSection(outing, units) {
  const {table: node, rows} = sensorTable('Health of each channel at the end');
  const names = new Map((outing.hello?.channels ?? []).map((c) => [c.name, c.unit]));
  rows.append(...sensorOrder(outing.health).map((h) => sensorRow(h, names.get(h.name) ?? '', units)));
  return html('section', {id: 'sensors'}, html('h2', {}, 'Sensors at the end'), node);
}

/** @param {Outing} outing */
export function settingsSection({hello, end}) {
  /** @type {[string, string][]} */
  const facts = [['Program', `Holdfast ${hello?.version ?? 'unknown'}`]];
  if (hello) {
    facts.push(['Short is', `more than ${fixed(hello.limits.short_share * 100, 1)} % of the rear downforce missing at the brakes`]);
    facts.push(['Alarm at', `a probability of ${fixed(hello.limits.alarm_probability, 2)} of being short`]);
    facts.push(['Slow is', `more than ${fixed(hello.limits.slow_factor, 1)} times the car’s usual, in chords`]);
  }
  if (end?.summary?.car?.file) facts.push(['Car file', end.summary.car.file]);
  return html('section', {}, html('h2', {}, 'Settings and versions'), factList(facts));
}
