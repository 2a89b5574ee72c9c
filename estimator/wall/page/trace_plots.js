// SPDX-License-Identifier: MIT
// The plots of the traces: what each shows, and how uPlot is told. Used by the page and by the report.
import {html} from "./svg.js";
import {fixed, unitOf, clock} from "./units.js";

/** @typedef {import('./units.js').UnitChoice} UnitChoice */
/** @typedef {import('uplot')} Plot */

/** One line of a plot: column, its name, colour and dashes, and the share of it that is drawn as a 95 % band. */
/** @typedef {{column: string, name: string, colour: string, dash?: number[], band?: boolean}} Trace */
/** @typedef {{title: string, kind: "speed"|"force"|"area"|"percent", traces: Trace[], zero?: boolean}} PlotPlan */

/** @type {PlotPlan[]} */
export const PLOTS = [
  {title: 'Speed', kind: 'speed', traces: [{column: 'speed', name: 'over ground', colour: '--ink'}]},
  {
    title: 'Flap',
    kind: 'percent',
    traces: [
      {column: 'flap', name: 'open', colour: '--brake'},
      {column: 'attached', name: 'flow attached', colour: '--flow', dash: [5, 3]},
    ],
  },
  {
    title: 'Axle loads',
    kind: 'force',
    traces: [
      {column: 'load_front', name: 'front', colour: '--second', dash: [5, 3]},
      {column: 'load_rear', name: 'rear', colour: '--flow'},
    ],
  },
  {
    title: 'Areas',
    kind: 'area',
    zero: true,
    traces: [
      {column: 'cla_front', name: 'downforce front', colour: '--second', dash: [5, 3], band: true},
      {column: 'cla_rear', name: 'downforce rear', colour: '--flow', band: true},
      {column: 'cda', name: 'drag', colour: '--third', dash: [2, 3], band: true},
    ],
  },
];

/** Columns that the plots need. */
export const PLOT_COLUMNS = [...new Set(PLOTS.flatMap((p) => p.traces.flatMap((t) => (t.band ? [t.column, `${t.column}_sd`] : [t.column]))))];

/** @param {PlotPlan} plan @param {UnitChoice} units */
export function plotUnit(plan, units) {
  return plan.kind === 'percent' ? {word: '%', per_si: 100} : unitOf(units, plan.kind);
}

/** @param {string} name of a custom property */
function colour(name) {
  return getComputedStyle(document.documentElement).getPropertyValue(name).trim();
}

/** uPlot's data of one plot out of a window of the series. @param {PlotPlan} plan @param {(number|null)[][]} window @param {UnitChoice} units */
export function plotData(plan, window, units) {
  const per_si = plotUnit(plan, units).per_si;
  const column = (/** @type {string} */ name) => window[PLOT_COLUMNS.indexOf(name) + 1];
  const data = [window[0]];
  for (const trace of plan.traces) {
    const values = column(trace.column);
    data.push(values.map((v) => (v === null ? null : v * per_si)));
    if (!trace.band) continue;
    const sd = column(`${trace.column}_sd`);
    const edge = (/** @type {number} */ side) => values.map((v, i) => (v === null || sd[i] === null ? null : (v + side * 1.96 * /** @type {number} */ (sd[i])) * per_si));
    data.push(edge(1), edge(-1));
  }
  return data;
}

/** Range of the lines alone, with air around: a band that is still wide runs out of the plot. @param {PlotPlan} plan */
function rangeOf(plan) {
  return (/** @type {Plot} */ plot) => {
    if (plan.kind === 'percent') return /** @type {[number, number]} */ ([-5, 105]);
    let low = plan.zero ? 0 : Infinity;
    let high = -Infinity;
    let column = 1;
    for (const trace of plan.traces) {
      for (const value of plot.data[column]) {
        if (value === null || value === undefined) continue;
        low = Math.min(low, value);
        high = Math.max(high, value);
      }
      column += trace.band ? 3 : 1;
    }
    if (!(high > low)) return /** @type {[number, number]} */ ([0, 1]);
    const air = (high - low) * 0.08;
    return /** @type {[number, number]} */ ([plan.zero ? low : low - air, high + air]);
  };
}

/**
 * @param {PlotPlan} plan @param {{width: number, height: number, em: number}} size
 * @param {{last: boolean, cursor: object, hooks: object, span: () => [number, number]}} how
 * @returns {import('uplot').Options}
 */
export function plotOptions(plan, size, how) {
  const grid = {stroke: colour('--grid'), width: 1};
  const text = {stroke: colour('--quiet'), font: `${Math.round(size.em)}px system-ui, sans-serif`};
  const series = [{}];
  const bands = [];
  for (const trace of plan.traces) {
    series.push({label: trace.name, stroke: colour(trace.colour), width: 1.6, dash: trace.dash, spanGaps: false, points: {show: false}});
    if (!trace.band) continue;
    const edge = {stroke: 'transparent', width: 0, points: {show: false}};
    bands.push({series: /** @type {[number, number]} */ ([series.length, series.length + 1]), fill: colour(`${trace.colour}-band`)});
    series.push({...edge}, {...edge});
  }
  return {
    width: size.width,
    height: size.height,
    padding: [6, 12, how.last ? 0 : 4, 0],
    legend: {show: false},
    cursor: how.cursor,
    hooks: how.hooks,
    scales: {x: {time: false, range: () => how.span()}, y: {range: rangeOf(plan)}},
    axes: [
      {...text, grid, ticks: {show: false}, show: how.last, size: size.em * 1.9, space: size.em * 6, values: (_, splits) => splits.map((t) => clock(t, splits.length > 1 && splits[1] - splits[0] < 1 ? 1 : 0))},
      {...text, grid, ticks: {show: false}, size: size.em * 4.2, space: size.em * 1.9, values: (_, splits) => splits.map((v) => fixed(v, decimalsOf(splits)))},
    ],
    series,
    bands,
  };
}

/** @param {number[]} splits */
function decimalsOf(splits) {
  const step = splits.length > 1 ? splits[1] - splits[0] : 1;
  return step >= 1 ? 0 : Math.min(3, Math.ceil(-Math.log10(step)));
}

/** Title of a plot with its lines' names, each beside a sample of its dashes. @param {PlotPlan} plan @param {UnitChoice} units */
export function plotTitle(plan, units) {
  const values = plan.traces.map(() => html('span', {class: 'figure trace-value'}));
  const names = plan.traces.map((trace, i) => html('span', {class: `trace-name trace-${trace.column}`}, trace.name, ' ', values[i]));
  const bands = plan.traces.some((t) => t.band) ? '; bands 95 %' : '';
  const node = html('p', {class: 'trace-title'}, html('b', {}, plan.title), html('span', {class: 'quiet'}, ` ${plotUnit(plan, units).word}${bands}`), ...names);
  return {node, values};
}
