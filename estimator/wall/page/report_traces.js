// SPDX-License-Identifier: MIT
// The whole outing in traces, by the page's own plots.
import uPlot from "./uPlot.esm.js";
import {html} from "./svg.js";
import {PLOTS, PLOT_COLUMNS, plotData, plotOptions, plotTitle} from "./trace_plots.js";

const SIZE = {width: 690, em: 11};
const MOST_POINTS = 2000;

/** @param {import('./outing.js').Outing} outing @param {import('./units.js').UnitChoice} units @param {HTMLElement} report */
export function tracesSection(outing, units, report) {
  const section = html('section', {id: 'traces'}, html('h2', {}, 'The outing in traces'));
  const {series} = outing;
  if (!Number.isFinite(series.newest)) {
    section.append(html('p', {}, 'None.'));
    return section;
  }
  report.append(section); // uPlot measures text as it draws
  const window = series.window(series.first, series.newest, PLOT_COLUMNS, MOST_POINTS);
  PLOTS.forEach((plan, i) => {
    const last = i === PLOTS.length - 1;
    const height = plan.kind === 'area' ? 120 : 70;
    const frame = html('div', {class: 'trace-plot'});
    section.append(plotTitle(plan, units).node, frame);
    const options = plotOptions(plan, {...SIZE, height: height + (last ? 20 : 0)}, {last, cursor: {show: false}, hooks: {}, span: () => [series.first, series.newest]});
    new uPlot(options, /** @type {any} */ (plotData(plan, window, units)), frame);
  });
  return section;
}
