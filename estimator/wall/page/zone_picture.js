// SPDX-License-Identifier: MIT
// The picture of one braking zone: margin of each closing, lap by lap, with its 95 % interval, over the usual band.
// Above the line the flow was back before the brakes; below it the brakes came first.
import {svg, scale, ticks} from "./svg.js";
import {fixed} from "./units.js";
import {mark, closureMark} from "./marks.js";

/** @typedef {import('./protocol.js').Closure} Closure */

/**
 * Ranges that all zones share, so that they can be compared at a glance.
 * @param {Closure[]} closures @returns {{laps: [number, number], margin: [number, number]}}
 */
export function zoneRanges(closures) {
  const known = closures.filter((c) => c.margin !== null);
  const laps = closures.map((c) => c.lap);
  const ends = known.flatMap((c) => {
    const [value, sd] = /** @type {[number, number]} */ (c.margin);
    return [value - 1.96 * sd, value + 1.96 * sd];
  });
  const first = laps.length ? Math.min(...laps) : 1;
  const last = laps.length ? Math.max(...laps) : 1;
  // Margins beyond these are far from the question; their marks stand at the edge.
  const low = Math.max(-0.8, Math.min(-0.1, ...ends));
  const high = Math.min(1.2, Math.max(0.2, ...ends));
  return {laps: [first, Math.max(last, first + 4)], margin: [Math.floor(low * 10) / 10, Math.ceil(high * 10) / 10]};
}

/**
 * @typedef {object} ZoneView
 * @property {number} zone
 * @property {Closure[]} closures of this zone
 * @property {{laps: [number, number], margin: [number, number]}} ranges
 * @property {import('./usual.js').Usual|null} usual margin, from the closings before the one that is looked at
 * @property {number} chosen number of the closing that Regrowth shows
 * @property {number} width px
 * @property {number} height px
 * @property {number} em px of a line of text
 */

/** @param {ZoneView} view @returns {SVGElement} */
export function zonePicture({zone, closures, ranges, usual, chosen, width, height, em}) {
  const plot = {left: 2.9 * em, right: width - 0.9 * em, top: 0.7 * em, bottom: height - 1.5 * em};
  const x = scale(ranges.laps[0] - 0.4, ranges.laps[1] + 0.4, plot.left, plot.right);
  const y = scale(ranges.margin[0], ranges.margin[1], plot.bottom, plot.top);
  const radius = Math.max(0.3 * em, Math.min(0.46 * em, (x(1) - x(0)) * 0.22));
  const root = svg('svg', {class: 'picture zone-picture', viewBox: `0 0 ${width} ${height}`, 'font-size': em, role: 'img', 'aria-label': spoken(zone, closures)});
  if (usual) {
    const inside = (/** @type {number} */ value) => Math.max(plot.top, Math.min(plot.bottom, y(value)));
    const top = Math.min(inside(usual.middle + usual.half), inside(usual.middle) - 2);
    const bottom = Math.max(inside(usual.middle - usual.half), inside(usual.middle) + 2);
    root.append(svg('rect', {class: 'usual-ground usual-edge', x: plot.left, width: plot.right - plot.left, y: top, height: bottom - top}));
  }
  root.append(svg('rect', {class: 'late-ground', x: plot.left, width: plot.right - plot.left, y: y(0), height: plot.bottom - y(0)}));
  for (const tick of ticks(ranges.margin[0], ranges.margin[1], Math.max(2, Math.floor((plot.bottom - plot.top) / (1.75 * em))))) {
    if (tick !== 0) root.append(svg('line', {class: 'grid', x1: plot.left, x2: plot.right, y1: y(tick), y2: y(tick)}));
    root.append(svg('text', {class: 'tick', x: plot.left - 0.35 * em, y: y(tick) + 0.32 * em, 'text-anchor': 'end'}, fixed(tick, 1)));
  }
  for (const lap of ticks(ranges.laps[0], ranges.laps[1], Math.max(2, Math.floor((plot.right - plot.left) / (2.4 * em))))) {
    if (Number.isInteger(lap)) root.append(svg('text', {class: 'tick', x: x(lap), y: plot.bottom + 1.15 * em, 'text-anchor': 'middle'}, String(lap)));
  }
  root.append(svg('line', {class: 'brake-line', x1: plot.left, x2: plot.right, y1: y(0), y2: y(0)}));
  for (const c of closures) root.append(closing(c, x(c.lap), y, plot, radius, c.number === chosen));
  return root;
}

/**
 * @param {Closure} c @param {number} at @param {(v: number) => number} y
 * @param {{top: number, bottom: number}} plot @param {number} radius @param {boolean} chosen
 */
function closing(c, at, y, plot, radius, chosen) {
  const inside = (/** @type {number} */ value) => Math.max(plot.top, Math.min(plot.bottom, value));
  const group = svg('g', {class: `zone-closing${chosen ? ' chosen' : ''}`, 'data-closing': c.number});
  if (chosen) group.append(svg('line', {class: 'chosen-line', x1: at, x2: at, y1: plot.top, y2: plot.bottom}));
  // A flow that settles short of whole has no margin: it stands at the bottom edge.
  let level = c.whole ? plot.top : plot.bottom;
  if (c.margin) {
    const [value, sd] = c.margin;
    level = inside(y(value));
    group.append(svg('line', {class: 'zone-whisker', x1: at, x2: at, y1: inside(y(value - 1.96 * sd)), y2: inside(y(value + 1.96 * sd))}));
  }
  group.append(mark(closureMark(c), at, level, radius, c.slow));
  group.append(svg('rect', {class: 'hit', x: at - radius * 2, width: radius * 4, y: plot.top, height: plot.bottom - plot.top}));
  group.append(svg('title', {}, `closing ${c.number}, lap ${c.lap}: ${marginWords(c)}`));
  return group;
}

/** @param {Closure} c */
function marginWords(c) {
  const margin = c.margin ? `margin ${fixed(c.margin[0] * 1000, 0)} ± ${fixed(c.margin[1] * 1000, 0)} ms` : 'no margin';
  return `${margin}, ${c.verdict ?? 'no braking'}${c.slow ? ', slow' : ''}`;
}

/** @param {number} zone @param {Closure[]} closures */
function spoken(zone, closures) {
  return `Zone ${zone}: ` + closures.map((c) => `lap ${c.lap} ${marginWords(c)}`).join('; ');
}
