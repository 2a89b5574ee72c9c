// SPDX-License-Identifier: MIT
// Traces: the last minute, or any stretch of the outing; one time cursor for all; drag to zoom.
import uPlot from "./uPlot.esm.js";
import {html} from "./svg.js";
import {measure} from "./wall.js";
import {clock, fixed} from "./units.js";
import {PLOTS, PLOT_COLUMNS, plotData, plotOptions, plotTitle} from "./trace_plots.js";

const MINUTE_S = 60;
const SHORTEST_S = 0.5;
const MOST_POINTS = 1400; // more than a plot has pixels

/**
 * @param {import('./wall.js').Wall} wall @param {HTMLElement} root
 * @returns {import('./wall.js').Part & {pan: (part: number) => void, zoom: (factor: number) => void, live: () => void, moveCursor: (step: number) => void}}
 */
export function tracesPart(wall, root) {
  const slider = html('input', {type: 'range', class: 'trace-slider', 'aria-label': 'time at the right edge', min: 0, max: 0, step: 0.1});
  const live = html('button', {type: 'button', 'aria-keyshortcuts': 'Home'}, 'last minute');
  const whole = html('button', {type: 'button'}, 'whole outing');
  const words = html('span', {class: 'figure trace-window'});
  const moment = html('p', {class: 'quiet trace-moment'}, 'As known at each moment. The report and estimates.csv of this replay are smoothed: their areas use the whole outing.');
  const stack = html('div', {class: 'trace-stack'});
  root.append(html('div', {class: 'bar'}, live, whole, slider, words), moment, stack);

  /** @type {{from: number, to: number}|null} null follows the newest minute */
  let held = null;
  /** @type {import('uplot')[]} */
  let plots = [];
  /** @type {HTMLElement[][]} */
  let values = [];
  /** @type {(number|null)[][]} */
  let shown = [[]];
  let made = '';

  const first = () => wall.outing.series.first;
  const newest = () => wall.outing.series.newest;

  /** @returns {[number, number]} */
  function span() {
    if (held) return [held.from, held.to];
    const end = Number.isFinite(newest()) ? newest() : MINUTE_S;
    return [end - MINUTE_S, end];
  }

  /** Shows [from, to], within the outing. @param {number} from @param {number} to */
  function hold(from, to) {
    const length = Math.max(SHORTEST_S, Math.min(to - from, newest() - first()));
    const start = Math.max(first(), Math.min(from, newest() - length));
    held = {from: start, to: start + length};
    wall.touch('traces');
  }

  live.addEventListener('click', follow);
  whole.addEventListener('click', () => hold(first(), newest()));
  slider.addEventListener('input', () => {
    const [from, to] = span();
    const end = Number(slider.value);
    hold(end - (to - from), end);
  });

  function follow() {
    held = null;
    wall.touch('traces');
  }

  /** Values under the cursor, or the newest where it is nowhere. */
  function readout() {
    const index = plots[0]?.cursor.idx;
    const row = index ?? shown[0].length - 1;
    PLOTS.forEach((plan, p) => {
      const data = plots[p]?.data;
      if (!data) return;
      let column = 1;
      plan.traces.forEach((trace, i) => {
        const value = data[column]?.[row];
        values[p][i].textContent = value === null || value === undefined ? '–' : fixed(value, plan.kind === 'area' ? 2 : Math.abs(value) < 100 ? 1 : 0);
        column += trace.band ? 3 : 1;
      });
    });
    const [from, to] = span();
    const at = index === null || index === undefined ? '' : `cursor ${clock(Number(shown[0][row]), 2)}; `;
    words.textContent = `${at}${clock(from)} to ${clock(to)}`;
  }

  /** Closings as ticks on the time axis. @param {import('uplot')} plot */
  function drawClosings(plot) {
    const {ctx, bbox} = plot;
    ctx.save();
    ctx.strokeStyle = getComputedStyle(document.documentElement).getPropertyValue('--quiet').trim();
    ctx.setLineDash([2, 3]);
    ctx.beginPath();
    for (const closure of wall.outing.closures.values()) {
      const x = Math.round(plot.valToPos(closure.time_command, 'x', true)) + 0.5;
      if (x < bbox.left || x > bbox.left + bbox.width) continue;
      ctx.moveTo(x, bbox.top);
      ctx.lineTo(x, bbox.top + bbox.height);
    }
    ctx.stroke();
    ctx.restore();
  }

  function make() {
    const {width, height: room, em} = measure(stack);
    const fill = getComputedStyle(stack).getPropertyValue('--fill').trim() === '1';
    const key = [width, fill ? room : 0, em, document.documentElement.dataset.theme, JSON.stringify(wall.preferences.units)].join();
    if (key === made) return;
    made = key;
    for (const plot of plots) plot.destroy();
    stack.replaceChildren();
    const cursor = {sync: {key: 'wall'}, drag: {x: true, y: false, setScale: false}, points: {size: 6}, bind: {dblclick: () => () => (follow(), null)}};
    const setSelect = (/** @type {import('uplot')} */ plot) => {
      if (plot.select.width < 4) return;
      hold(plot.posToVal(plot.select.left, 'x'), plot.posToVal(plot.select.left + plot.select.width, 'x'));
      plot.setSelect({left: 0, top: 0, width: 0, height: 0}, false);
    };
    values = [];
    // Lines of text that the titles and the time axis take; the plots share the rest, areas half as much again.
    const share = fill ? Math.max(4 * em, (room - (moment.hidden ? 13 : 16) * em) / (PLOTS.length + 0.5)) : 6.2 * em;
    plots = PLOTS.map((plan, i) => {
      const title = plotTitle(plan, wall.preferences.units);
      values.push(title.values);
      const frame = html('div', {class: 'trace-plot', 'aria-hidden': 'true'});
      stack.append(title.node, frame);
      const last = i === PLOTS.length - 1;
      const height = Math.round(share * (plan.kind === 'area' ? 1.5 : 1) + (last ? em * 1.9 : 0));
      const hooks = {setSelect: [setSelect], draw: [drawClosings], setCursor: i === 0 ? [readout] : []};
      return new uPlot(plotOptions(plan, {width, height, em}, {last, cursor, hooks, span}), undefined, frame);
    });
  }

  function draw() {
    make();
    const [from, to] = span();
    shown = wall.outing.series.window(from, to, PLOT_COLUMNS, MOST_POINTS);
    PLOTS.forEach((plan, i) => plots[i].setData(/** @type {any} */ (plotData(plan, shown, wall.preferences.units))));
    moment.hidden = !wall.outing.hello?.smoothed;
    live.setAttribute('aria-pressed', String(held === null));
    slider.min = String(Math.min(first() + (to - from), newest()) || 0);
    slider.max = String(newest() || 0);
    if (document.activeElement !== slider || held === null) slider.value = String(to);
    slider.setAttribute('aria-valuetext', clock(to));
    readout();
  }

  return {
    needs: ['hello', 'history', 'now', 'closure', 'closures', 'preferences', 'size', 'traces'],
    least_ms: 100,
    draw,
    pan(part) {
      const [from, to] = span();
      const move = (to - from) * part;
      if (to + move >= newest() && part > 0) follow();
      else hold(from + move, to + move);
    },
    zoom(factor) {
      const [from, to] = span();
      const half = ((to - from) * factor) / 2;
      const centre = plots[0]?.cursor.idx ? Number(shown[0][plots[0].cursor.idx]) : (from + to) / 2;
      hold(centre - half, centre + half);
    },
    live: follow,
    moveCursor(step) {
      const plot = plots[0];
      if (!plot || shown[0].length === 0) return;
      const at = Math.max(0, Math.min(shown[0].length - 1, (plot.cursor.idx ?? shown[0].length - 1) + step));
      const left = plot.valToPos(Number(shown[0][at]), 'x');
      for (const p of plots) p.setCursor({left, top: 10}, p === plot);
      readout();
    },
  };
}
