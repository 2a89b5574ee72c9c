// SPDX-License-Identifier: MIT
// What was analysed and how good the data were: the first thing a reader has to know.
import {html} from "./svg.js";
import {clock, fixed} from "./units.js";
import {FAULT_WORDS} from "./words.js";

/** @typedef {import('./outing.js').Outing} Outing */

/** @param {[string, string][]} facts */
export function factList(facts) {
  return html('dl', {class: 'facts'}, ...facts.flatMap(([name, value]) => [html('dt', {}, name), html('dd', {}, value)]));
}

/** @param {Outing} outing */
export function dataSection(outing) {
  const {hello, series, end} = outing;
  const summary = end?.summary;
  /** @type {[string, string][]} */
  const facts = [['Input', hello?.origin ?? 'unknown']];
  facts.push(['Length', `${clock(summary?.duration ?? series.newest - series.first)} of source time`]);
  if (summary?.frames) facts.push(['Instants', `${fixed(summary.frames.used, 0)} used, ${summary.frames.repeated} repeated, ${summary.frames.out_of_order} out of order`]);
  facts.push(['Areas refer to', hello?.reference === 'air' ? 'speed through the air' : 'speed over ground: the wind is in them']);
  if (summary) facts.push(['Air density', summary.air_density ?? 'unknown']);
  if (summary?.link) facts.push(['Link', Object.entries(summary.link).map(([name, count]) => `${name.replaceAll('_', ' ')} ${count}`).join(', ')]);
  facts.push(['Channels', channelWords(outing)]);
  return html('section', {}, html('h2', {}, 'What was analysed, and how good the data were'), ...warnings(outing), factList(facts));
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
