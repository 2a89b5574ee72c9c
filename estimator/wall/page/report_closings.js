// SPDX-License-Identifier: MIT
// The report's closings: a table of their numbers, and a small picture of each one's regrowth.
import {html, svg, scale, freshId} from "./svg.js";
import {icon, closureMark} from "./marks.js";
import {clock, fixed, plusMinus, quantityText, speedText, unitOf, msRange, probabilityText} from "./units.js";
import {usualBand} from "./usual.js";
import {usualCurves, ownCurves} from "./regrowth_picture.js";
import {valueAt} from "./curve.js";
import {table} from "./report_tables.js";

/** @typedef {import('./protocol.js').Closure} Closure */
/** @typedef {import('./protocol.js').Quantity} Quantity */
/** @typedef {import('./outing.js').Outing} Outing */
/** @typedef {import('./units.js').UnitChoice} UnitChoice */

const PRINTED = 48; // more small pictures than this are a handful of pages by themselves

/** Milliseconds of a quantity. @param {Quantity|null} q */
function ms(q) {
  return q === null ? '–' : plusMinus(q[0] * 1000, q[1] * 1000, 0);
}

/** When 95 % was back, or where the flow settles. @param {Closure} c */
function backText(c) {
  if (c.t95 === null) return c.plateau === null ? '–' : `settles at ${fixed(c.plateau * 100, 0)} %`;
  const interval = c.t95_low === null || c.t95_high === null ? '' : ` (${msRange(c.t95_low, c.t95_high)})`;
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
    c.probability_short === null ? '–' : probabilityText(c.probability_short),
    c.probability_slow === null ? '–' : probabilityText(c.probability_slow),
  ];
}

/** @param {Outing} outing @param {UnitChoice} units */
export function closuresSection(outing, units) {
  const headings = ['At the brakes', 'No.', 'Lap', 'Zone', 'Asked for', 'Speed', '95 % back, ms (95 %)', 'Chords', 'Margin, ms', `Missing, ${unitOf(units, 'force').word}`, 'P(short)', 'P(slow)'];
  const closures = outing.closuresInOrder();
  if (closures.length === 0) return html('section', {id: 'closings'}, html('h2', {}, 'Closings'), html('p', {}, 'None.'));
  return html('section', {id: 'closings'}, html('h2', {}, 'Closings'), table('Closings', headings, closures.map((c) => closureRow(c, units)), 1), ...pictures(outing, closures, units));
}


/** Each closing's regrowth, all to one scale. @param {Outing} outing @param {Closure[]} closures @param {UnitChoice} units */
function pictures(outing, closures, units) {
  const shown = closures.filter((c) => outing.regrowths.get(c.number)?.shut);
  if (shown.length === 0) return [];
  const ends = shown.map((c) => Math.max(c.t95 ?? 0, c.time_brake === null ? 0 : c.time_brake - c.time_closed));
  const end = Math.min(1.2, Math.max(0.3, Math.ceil(Math.max(...ends) * 1.15 * 10) / 10));
  const crowded = shown.length > PRINTED;
  const cells = shown.map((c) => {
    const plain = c.verdict !== 'short' && c.verdict !== 'unclear' && !c.slow;
    const words = c.shortfall ? `${quantityText(c.shortfall, units, 'force')} missing` : c.time_brake === null ? 'no braking' : 'unknown';
    const name = html('b', {}, icon(closureMark(c), c.slow), ` ${c.number}`);
    return html('figure', {class: crowded && plain ? 'closing-cell not-printed' : 'closing-cell'}, html('figcaption', {}, name, ` lap ${c.lap}${c.zone ? `, zone ${c.zone}` : ''}`), smallPicture(outing, c, end), html('figcaption', {}, words));
  });
  const key = `Flap’s downforce that is back, 0 to 100 %, from 100 ms before the flap is shut (dotted) to ${fixed(end * 1000, 0)} ms after. Line at the brakes, with what was missing; hatched: usual.`;
  const left = crowded ? ' In print, only those that were short, unclear or slow.' : '';
  return [html('h3', {}, 'Each closing’s regrowth'), html('p', {class: 'quiet'}, key + left), html('div', {class: 'closing-grid'}, ...cells)];
}

/** @param {Outing} outing @param {Closure} c @param {number} end of the time axis, s after shut */
function smallPicture(outing, c, end) {
  const regrowth = /** @type {import('./protocol.js').Regrowth} */ (outing.regrowths.get(c.number));
  const [width, height] = [150, 78];
  const x = scale(-0.1, end, 1, width - 1);
  const y = scale(0, 1.05, height - 2, 2);
  const clip = freshId();
  const usual = usualBand(outing, c.zone, Infinity, regrowth.chord_time);
  const line = (/** @type {string} */ kind, /** @type {number} */ at) => svg('line', {class: kind, x1: x(at), x2: x(at), y1: 2, y2: height - 2});
  const curves = svg('g', {'clip-path': `url(#${clip})`}, ...usualCurves(usual, 8, x, y), ...ownCurves(regrowth, x, y));
  const root = svg(
    'svg',
    {class: 'picture small-regrowth', viewBox: `0 0 ${width} ${height}`, role: 'img', 'aria-label': `Regrowth of closing ${c.number}`},
    svg('defs', {}, svg('clipPath', {id: clip}, svg('rect', {x: 1, y: 0, width: width - 2, height}))),
    ...[0, 0.5, 1].map((share) => svg('line', {class: share === 1 ? 'whole-line' : 'grid', x1: 1, x2: width - 1, y1: y(share), y2: y(share)})),
    line('zero-line', 0),
    curves,
  );
  if (c.time_brake !== null) {
    const at = c.time_brake - regrowth.time_shut;
    const share = Math.min(1, valueAt(regrowth.t, regrowth.share, at));
    if (at <= end) root.append(line('brake-line', at));
    if (at <= end && Number.isFinite(share)) root.append(svg('line', {class: 'missing-bar', x1: x(at), x2: x(at), y1: y(share), y2: y(1)}));
  }
  return root;
}
