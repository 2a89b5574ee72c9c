// SPDX-License-Identifier: MIT
// The picture of one closing: the share of the flap's downforce that is back against time since the flap shut, over
// the band of the zone's usual closings, with the brakes' line and what was missing there; the flap's movement below.
import {svg, linePath, bandPath, scale, ticks, freshId} from "./svg.js";
import {fixed, quantityText, span} from "./units.js";
import {mark} from "./marks.js";
import {valueAt, finer, finerValues} from "./curve.js";

const PIECES = 5; // of each of the points' 20 ms

/** @typedef {import('./protocol.js').Closure} Closure */
/** @typedef {import('./protocol.js').Regrowth} Regrowth */

/**
 * @typedef {object} RegrowthView
 * @property {Regrowth} regrowth
 * @property {Closure|undefined} closure
 * @property {import('./usual.js').UsualBand} usual
 * @property {import('./units.js').UnitChoice} units
 * @property {number} width px
 * @property {number} height px
 * @property {number} em px of a line of text
 */

/** What stands beside the brakes' line, in px. @param {RegrowthView} view */
function brakeWords({closure: c, regrowth: r, units, em, width}) {
  const size = width < 38 * em ? {missing: 1.25 * em, when: em} : {missing: 1.56 * em, when: 1.12 * em};
  if (!c || c.time_brake === null) return {when: '', missing: '', size, reach: 0};
  const t = c.time_brake - r.time_shut;
  const when = t >= 0 ? `brakes on ${span(t)} after shut` : `brakes on ${span(-t)} before shut`;
  const missing = c.shortfall ? `${quantityText(c.shortfall, units, 'force')} missing` : '';
  // A bold letter is some 0.62 of its size wide; and a letter of air on either side.
  return {when, missing, size, reach: 0.62 * Math.max(missing.length * size.missing, when.length * size.when) + 1.2 * em};
}

/**
 * End of the time axis: far enough for the story and for the words right of the brakes' line, no farther.
 * @param {RegrowthView} view @param {number} room px of the axis
 */
function timeEnd(view, room) {
  const {regrowth: r, closure: c} = view;
  const last = r.t[r.t.length - 1];
  if (!r.final && r.known_until < 0.5) return Math.min(last, 0.6);
  if (!r.final || !c || !c.whole) return last;
  const words = Math.min(0.5, brakeWords(view).reach / room);
  const brake = c.time_brake === null ? 0 : r.t[0] + (c.time_brake - r.time_shut - r.t[0]) / (1 - words);
  const wanted = Math.max(0.4, (c.t95_high ?? 0.5) * 1.25, brake);
  return Math.min(last, Math.ceil(wanted * 10 - 1e-9) / 10);
}

/** @param {RegrowthView} view @returns {SVGElement} */
export function regrowthPicture(view) {
  const {regrowth: r, width, height, em} = view;
  const flapHeight = Math.max(2.2 * em, height * 0.13);
  const plot = {left: 3.6 * em, right: width - 1.5 * em, top: 2.5 * em, bottom: height - flapHeight - 3.4 * em};
  const end = timeEnd(view, plot.right - plot.left);
  const x = scale(r.t[0], end, plot.left, plot.right);
  const y = scale(0, 1.1, plot.bottom, plot.top);
  const flap = {top: plot.bottom + 0.7 * em, bottom: plot.bottom + 0.7 * em + flapHeight};
  const clip = freshId();
  const root = svg(
    'svg',
    {class: 'picture regrowth-picture', viewBox: `0 0 ${width} ${height}`, 'font-size': em, role: 'img', 'aria-label': spoken(view)},
    svg('defs', {}, svg('clipPath', {id: clip}, svg('rect', {x: plot.left, y: 0, width: plot.right - plot.left, height}))),
  );
  root.append(...axes(view, end, x, y, plot, flap));
  const curves = svg('g', {'clip-path': `url(#${clip})`});
  curves.append(...usualCurves(view.usual, em, x, y), ...ownCurves(r, x, y), ...flapCurve(r, x, flap));
  root.append(curves, ...instant95(view, x, y, plot), ...brakes(view, x, y, plot, flap));
  return root;
}

/** What the picture shows, for those who do not see it. @param {RegrowthView} view */
function spoken({regrowth, closure, usual, units}) {
  const parts = [`Regrowth of closing ${regrowth.closure}`];
  if (closure && closure.t95 !== null) parts.push(`95 percent back ${span(closure.t95)} after the flap shut`);
  if (closure?.shortfall) parts.push(`${quantityText(closure.shortfall, units, 'force')} missing at the brakes`);
  parts.push(usual.share.length ? `usual band from ${usual.count} earlier closings` : 'usual not known yet');
  return parts.join('; ');
}

/** @typedef {(value: number) => number} Scale */
/** @typedef {{left: number, right: number, top: number, bottom: number}} Box */

/** @param {RegrowthView} view @param {number} to @param {Scale} x @param {Scale} y @param {Box} plot @param {{top: number, bottom: number}} flap */
function axes({regrowth: r, em}, to, x, y, plot, flap) {
  const from = r.t[0];
  const nodes = [];
  for (const share of [0, 0.25, 0.5, 0.75, 1]) {
    nodes.push(svg('line', {class: share === 1 ? 'whole-line' : 'grid', x1: plot.left, x2: plot.right, y1: y(share), y2: y(share)}));
    nodes.push(svg('text', {class: 'tick', x: plot.left - 0.4 * em, y: y(share) + 0.32 * em, 'text-anchor': 'end'}, `${share * 100} %`));
  }
  for (const t of ticks(from, to, Math.min(8, (plot.right - plot.left) / (4 * em)))) {
    nodes.push(svg('line', {class: 'grid', x1: x(t), x2: x(t), y1: plot.top, y2: flap.bottom}));
    nodes.push(svg('text', {class: 'tick', x: x(t), y: flap.bottom + 1.1 * em, 'text-anchor': 'middle'}, fixed(t * 1000, 0)));
  }
  nodes.push(svg('line', {class: 'zero-line', x1: x(0), x2: x(0), y1: plot.top, y2: flap.bottom}));
  const since = r.shut ? 'ms since the flap shut' : 'ms since closing was asked for';
  nodes.push(svg('text', {class: 'axis-name', x: plot.right, y: flap.bottom + 2.3 * em, 'text-anchor': 'end'}, since));
  nodes.push(svg('text', {class: 'axis-name', x: 0.2 * em, y: 0.85 * em}, 'flap’s downforce that is back'));
  if (r.chord_time > 0) {
    for (const n of ticks(0, to / r.chord_time, Math.min(7, (plot.right - plot.left) / (4 * em)))) {
      const at = x(n * r.chord_time);
      nodes.push(svg('line', {class: 'tick-line', x1: at, x2: at, y1: plot.top - 0.35 * em, y2: plot.top}));
      nodes.push(svg('text', {class: 'tick', x: at, y: plot.top - 0.6 * em, 'text-anchor': 'middle'}, String(n)));
    }
    nodes.push(svg('text', {class: 'axis-name', x: plot.right, y: 0.85 * em, 'text-anchor': 'end'}, 'chords of travel'));
  }
  nodes.push(svg('text', {class: 'tick', x: plot.left - 0.4 * em, y: flap.top + 0.8 * em, 'text-anchor': 'end'}, 'open'));
  nodes.push(svg('text', {class: 'tick', x: plot.left - 0.4 * em, y: flap.bottom, 'text-anchor': 'end'}, 'shut'));
  nodes.push(svg('line', {class: 'axis-line', x1: plot.left, x2: plot.right, y1: flap.bottom, y2: flap.bottom}));
  nodes.push(svg('line', {class: 'axis-line', x1: plot.left, x2: plot.right, y1: plot.bottom, y2: plot.bottom}));
  return nodes;
}

/** @param {import('./usual.js').UsualBand} usual @param {number} em @param {Scale} x @param {Scale} y */
export function usualCurves(usual, em, x, y) {
  if (usual.share.length === 0) return [];
  const levels = usual.share.map(y);
  const around = `${linePath(usual.early.map(x), levels)}${linePath([...usual.late].reverse().map(x), [...levels].reverse()).replace('M', 'L')}Z`;
  const hatch = freshId();
  const size = 0.5 * em;
  return [
    svg(
      'defs',
      {},
      svg(
        'pattern',
        {id: hatch, width: size, height: size, patternUnits: 'userSpaceOnUse', patternTransform: 'rotate(45)'},
        svg('line', {class: 'usual-hatch', x1: 0, x2: 0, y1: 0, y2: size}),
      ),
    ),
    svg('path', {class: 'usual-ground', d: around}),
    svg('path', {class: 'usual-band', fill: `url(#${hatch})`, d: around}),
    svg('path', {class: 'usual-line', d: linePath(usual.middle.map(x), levels)}),
  ];
}

/** Solid as far as data reach, dashed where it is expectation. @param {Regrowth} r @param {Scale} x @param {Scale} y */
export function ownCurves(r, x, y) {
  const t = finer(r.t, PIECES);
  const last = t.length - 1;
  const reach = r.final ? last : t.findIndex((at) => at >= r.known_until);
  const split = reach < 0 ? last : reach;
  const at = t.map(x);
  const [share, low, high] = [r.share, r.low, r.high].map((values) => finerValues(r.t, values, PIECES).map(y));
  const part = (/** @type {number[]} */ values, /** @type {number} */ from, /** @type {number} */ to) => values.slice(from, to + 1);
  const band = (/** @type {number} */ from, /** @type {number} */ to) => bandPath(part(at, from, to), part(low, from, to), part(high, from, to));
  const line = (/** @type {number} */ from, /** @type {number} */ to) => linePath(part(at, from, to), part(share, from, to));
  return [
    svg('path', {class: 'own-band own-expected', d: band(split, last)}),
    svg('path', {class: 'own-line own-expected', d: line(split, last)}),
    svg('path', {class: 'own-band', d: band(0, split)}),
    svg('path', {class: 'own-line', d: line(0, split)}),
  ];
}

/** @param {Regrowth} r @param {Scale} x @param {{top: number, bottom: number}} flap */
function flapCurve(r, x, flap) {
  if (r.flap.t.length < 2) return [];
  const y = scale(0, 1, flap.bottom, flap.top);
  const at = r.flap.t.map(x);
  const values = r.flap.position.map(y);
  return [
    svg('path', {class: 'flap-area', d: bandPath(at, values.map(() => flap.bottom), values)}),
    svg('path', {class: 'flap-line', d: linePath(at, values)}),
  ];
}

/** The instant of 95 %, with its interval. @param {RegrowthView} view @param {Scale} x @param {Scale} y @param {Box} plot */
function instant95({closure: c, regrowth: r}, x, y, plot) {
  if (!c || !r.shut || c.t95 === null || c.t95_low === null || c.t95_high === null) return [];
  const high = Math.min(x(c.t95_high), plot.right);
  return [
    svg('line', {class: 'own-whisker', x1: x(c.t95_low), x2: high, y1: y(0.95), y2: y(0.95)}),
    mark('full', Math.min(x(c.t95), plot.right), y(0.95), 5),
  ];
}

/**
 * The brakes' line, what was missing on it, and both in words where the plot is empty: low, and right of the line where
 * there is room.
 * @param {RegrowthView} view @param {Scale} x @param {Scale} y @param {Box} plot @param {{bottom: number}} flap
 */
function brakes(view, x, y, plot, flap) {
  const {closure: c, regrowth: r, em} = view;
  if (!c || c.time_brake === null || !r.shut) return [];
  const {when, missing, size, reach} = brakeWords(view);
  const t = c.time_brake - r.time_shut;
  const at = x(t);
  const low = {missing: plot.bottom - 2.1 * em, when: plot.bottom - 0.6 * em};
  if (at > plot.right) {
    return [svg('text', {class: 'brake-text', 'font-size': size.when, x: plot.right, y: low.when, 'text-anchor': 'end'}, `${when} →`)];
  }
  const share = Math.min(1, valueAt(r.t, r.share, t));
  const beside = plot.right - at > reach - 0.6 * em;
  const text = beside ? {x: at + 0.6 * em, 'text-anchor': 'start'} : {x: plot.right, 'text-anchor': 'end'};
  return [
    svg('line', {class: 'brake-line', x1: at, x2: at, y1: plot.top, y2: flap.bottom}),
    ...(Number.isFinite(share) ? [svg('line', {class: 'missing-bar', x1: at, x2: at, y1: y(share), y2: y(1)})] : []),
    svg('text', {class: 'missing-text', 'font-size': size.missing, ...text, y: low.missing}, missing),
    svg('text', {class: 'brake-text', 'font-size': size.when, ...text, y: low.when}, when),
  ];
}
