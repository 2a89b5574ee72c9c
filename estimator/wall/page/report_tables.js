// SPDX-License-Identifier: MIT
// The report's tables: closings, areas, sensors, settings.
import {html} from "./svg.js";
import {icon, closureMark} from "./marks.js";
import {clock, fixed, plusMinus, speedText, unitOf} from "./units.js";
import {sensorTable, sensorRow, sensorOrder} from "./sensors_part.js";
import {areasBySpeed} from "./area_table.js";
import {factList} from "./report_data.js";

/** @typedef {import('./protocol.js').Closure} Closure */
/** @typedef {import('./protocol.js').Quantity} Quantity */
/** @typedef {import('./outing.js').Outing} Outing */
/** @typedef {import('./units.js').UnitChoice} UnitChoice */

/** What may be wider than a phone is scrolled by itself, by keyboard too. @param {string} name */
function wide(name) {
  return {class: 'wide', tabindex: 0, role: 'region', 'aria-label': name};
}

/**
 * @param {string} name @param {string[]} headings @param {(Node|string)[][]} rows
 * @param {number} words columns at the left that are words
 */
function table(name, headings, rows, words) {
  const cell = (/** @type {number} */ i) => ({class: i < words ? null : 'number'});
  return html(
    'div',
    wide(name),
    html('table', {}, html('thead', {}, html('tr', {}, ...headings.map((h, i) => html('th', {scope: 'col', ...cell(i)}, h)))), html('tbody', {}, ...rows.map((row) => html('tr', {}, ...row.map((value, i) => html('td', cell(i), value)))))),
  );
}

/** Milliseconds of a quantity. @param {Quantity|null} q */
function ms(q) {
  return q === null ? '–' : plusMinus(q[0] * 1000, q[1] * 1000, 0);
}

/** When 95 % was back, or where the flow settles. @param {Closure} c */
function backText(c) {
  if (c.t95 === null) return c.plateau === null ? '–' : `settles at ${fixed(c.plateau * 100, 0)} %`;
  const interval = c.t95_low === null || c.t95_high === null ? '' : ` (${fixed(c.t95_low * 1000, 0)}–${fixed(c.t95_high * 1000, 0)})`;
  return fixed(c.t95 * 1000, 0) + interval;
}

/** @param {Closure} c @param {UnitChoice} units @returns {(Node|string)[]} */
function closureRow(c, units) {
  const force = unitOf(units, 'force');
  const word = `${c.verdict ?? (c.t95 === null ? 'unknown' : 'no braking')}${c.slow ? ', slow' : ''}`;
  return [
    html('span', {}, icon(closureMark(c), c.slow), ` ${word}`),
    String(c.number),
    String(c.lap),
    c.zone ? String(c.zone) : '–',
    clock(c.time_command, 2),
    speedText(c.speed, units),
    backText(c),
    c.chords === null ? '–' : fixed(c.chords, 0),
    ms(c.margin),
    c.shortfall === null ? '–' : plusMinus(c.shortfall[0] * force.per_si, c.shortfall[1] * force.per_si, 0),
    c.probability_short === null ? '–' : fixed(c.probability_short, 2),
    c.probability_slow === null ? '–' : fixed(c.probability_slow, 2),
  ];
}

/** @param {Outing} outing @param {UnitChoice} units */
export function closuresSection(outing, units) {
  const headings = ['At the brakes', 'No.', 'Lap', 'Zone', 'Asked for', 'Speed', '95 % back, ms (95 %)', 'Chords', 'Margin, ms', `Missing, ${unitOf(units, 'force').word}`, 'P(short)', 'P(slow)'];
  const closures = outing.closuresInOrder();
  const content = closures.length ? table('Closings', headings, closures.map((c) => closureRow(c, units)), 1) : html('p', {}, 'None.');
  return html('section', {id: 'closings'}, html('h2', {}, 'Closings'), content);
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
  return html('section', {id: 'sensors'}, html('h2', {}, 'Sensors at the end'), html('div', wide('Sensors'), node));
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
