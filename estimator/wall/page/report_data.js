// SPDX-License-Identifier: MIT
// What was analysed and how good the data were: the first thing a reader has to know.
import {html} from "./svg.js";
import {clock, fixed, plusMinus, speedText} from "./units.js";
import {FAULT_WORDS} from "./words.js";

/** @typedef {import('./outing.js').Outing} Outing */

/** @param {[string, string][]} facts */
export function factList(facts) {
  return html('dl', {class: 'facts'}, ...facts.flatMap(([name, value]) => [html('dt', {}, name), html('dd', {}, value)]));
}

/** @param {Outing} outing @param {import('./units.js').UnitChoice} units */
export function dataSection(outing, units) {
  const {hello, series, end} = outing;
  const summary = end?.summary;
  /** @type {[string, string][]} */
  const facts = [['Input', hello?.origin ?? 'unknown']];
  facts.push(['Length', `${clock(summary?.duration ?? series.newest - series.first)} of source time`]);
  if (summary?.frames) facts.push(['Instants', `${fixed(summary.frames.used, 0)} used, ${summary.frames.repeated} repeated, ${summary.frames.out_of_order} out of order`]);
  facts.push(['Areas refer to', hello?.reference === 'air' ? 'speed through the air' : 'speed over ground: the wind is in them']);
  if (hello?.smoothed) facts.push(['Smoothed', 'areas use the whole outing; closings, and the wall page, what was known at the moment']);
  else facts.push(['Not smoothed', 'every value is what was known at its moment']);
  facts.push(['Air', airWords(end?.conditions ?? null, summary?.air_density)]);
  facts.push(['Wind', windWords(end?.conditions?.headwind ?? null, units)]);
  facts.push(['Mass', massWords(outing)]);
  facts.push(['Tyres', 'compound, pressures and wear are not known to the program; their rates are the car file’s']);
  if (summary?.link) facts.push(['Link', Object.entries(summary.link).map(([name, count]) => `${name.replaceAll('_', ' ')} ${count}`).join(', ')]);
  facts.push(['Channels', channelWords(outing)]);
  return html('section', {}, html('h2', {}, 'What was analysed, and how good the data were'), ...warnings(outing), factList(facts));
}

/** "24.0" or "23.1 to 24.0". @param {[number, number]} range @param {(value: number) => number} to @param {number} decimals */
function rangeText(range, to, decimals) {
  const [from, until] = range.map((value) => fixed(to(value), decimals));
  return from === until ? from : `${from} to ${until}`;
}

/** @param {import('./protocol.js').Conditions|null} c @param {string|undefined} source of the density */
function airWords(c, source) {
  const parts = [];
  if (c?.air_temperature) parts.push(`${rangeText(c.air_temperature, (k) => k - 273.15, 1)} °C`);
  if (c?.air_pressure) parts.push(`${rangeText(c.air_pressure, (pa) => pa / 100, 0)} hPa`);
  if (c?.relative_humidity) parts.push(`${rangeText(c.relative_humidity, (share) => share * 100, 0)} % humidity`);
  if (c?.air_density) parts.push(`density ${rangeText(c.air_density, (rho) => rho, 3)} kg/m³`);
  if (source === 'standard') parts.push('no weather channels: density of the standard atmosphere, 1.225 kg/m³ at sea level');
  return parts.length ? parts.join(', ') : 'unknown';
}

/** @param {[number, number]|null} headwind @param {import('./units.js').UnitChoice} units */
function windWords(headwind, units) {
  if (!headwind) return 'not known: without a pitot it is in the areas';
  return `air speed less speed over ground: mean ${speedText(headwind[0], units)}, standard deviation ${speedText(headwind[1], units)}`;
}

/** @param {Outing} outing */
function massWords({hello, end}) {
  if (!hello?.mass) return 'unknown';
  const start = `${plusMinus(...hello.mass, 1)} kg at the start by the car file`;
  const fuel = hello.fuel_per_lap;
  const laps = end?.conditions?.lap;
  if (!fuel || fuel[0] === 0) return `${start}; no fuel taken off`;
  const each = `${plusMinus(...fuel, 2)} kg of fuel a lap`;
  if (!laps) return `${start}; ${each}, but no lap channel: none taken off`;
  const whole = laps[1] - laps[0];
  return `${start}; ${each}, ${whole > 0 ? `${fixed(fuel[0] * whole, 1)} kg by the beginning of the last of ${fixed(whole + 1, 0)} laps` : 'none taken off within the first'}`;
}

/** @param {Outing} outing */
function warnings({end, health}) {
  const nodes = [];
  if (!end) nodes.push('This outing was still running when the report was made.');
  else if (!end.complete) nodes.push(`The input was not complete: ${end.summary?.incomplete_reason ?? 'reason unknown'}.`);
  for (const h of health.filter((c) => c.trust === 'distrusted')) {
    nodes.push(`${h.name} was left out since ${clock(h.since ?? NaN)}: it ${FAULT_WORDS[h.fault] || 'could not be trusted'}.`);
  }
  return nodes.map((words) => html('p', {class: 'warning'}, words));
}

/** @param {Outing} outing */
function channelWords({health}) {
  const present = health.filter((h) => h.trust !== 'absent');
  if (present.length === 0) return 'unknown';
  const sum = (/** @type {(h: import('./protocol.js').ChannelHealth) => number} */ of) => present.reduce((total, h) => total + of(h), 0);
  const good = present.filter((h) => h.trust === 'good').length;
  return `${good} of ${present.length} trusted at the end; ${fixed(sum((h) => h.gaps), 0)} gaps, ${fixed(sum((h) => h.gated + h.out_of_range + h.not_finite), 0)} samples refused of ${fixed(sum((h) => h.samples), 0)}`;
}
