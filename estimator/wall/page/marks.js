// SPDX-License-Identifier: MIT
// Marks that can be told apart by shape alone:
//   full: filled disc; short: triangle on its point; unclear: hollow lozenge; unknown: hollow disc with a bar;
//   slow: square frame around any of them, or a filled square with a notch where it stands alone;
//   alarms: octagon (act), lozenge (look), small disc (note).
import {svg} from "./svg.js";

/** @typedef {import('./protocol.js').Closure} Closure */

/** Shapes in a box from -1 to 1. @type {Record<string, string>} */
const SHAPES = {
  full: 'M-.72 0A.72.72 0 1 0 .72 0A.72.72 0 1 0-.72 0Z',
  short: 'M-.95-.72H.95L0 .95Z',
  unclear: 'M0-.9L.8 0L0 .9L-.8 0Z',
  unknown: 'M-.72 0A.72.72 0 1 0 .72 0A.72.72 0 1 0-.72 0ZM-.4 0H.4',
  slow: 'M-.75-.75H.75V.75H-.75ZM0-.45V.05L.4 .3',
  usual: 'M-.9.1L-.3.65L.9-.6',
  growing: 'M-.9.7C-.2.7-.2-.6.9-.6',
  good: 'M-.9.1L-.3.65L.9-.6',
  distrusted: 'M-.7-.7L.7.7M.7-.7L-.7.7',
  high: 'M-.38-.92H.38L.92-.38V.38L.38.92H-.38L-.92.38V-.38Z',
  medium: 'M0-.95L.9 0L0 .95L-.9 0Z',
  low: 'M-.5 0A.5.5 0 1 0 .5 0A.5.5 0 1 0-.5 0Z',
};

/**
 * @param {string} kind @param {number} x @param {number} y @param {number} radius
 * @param {boolean} [framed] with the square frame of a slow closing
 */
export function mark(kind, x, y, radius, framed = false) {
  return svg(
    'g',
    {class: `mark mark-${kind}${framed ? ' mark-framed' : ''}`, transform: `translate(${x.toFixed(1)} ${y.toFixed(1)}) scale(${radius})`},
    framed ? svg('path', {class: 'mark-frame', d: 'M-1.55-1.55H1.55V1.55H-1.55Z'}) : null,
    svg('path', {class: 'mark-shape', d: SHAPES[kind]}),
  );
}

/** A mark as a picture of its own, beside words that say the same. @param {string} kind @param {boolean} [framed] */
export function icon(kind, framed = false) {
  return svg('svg', {class: 'icon', viewBox: '-1.7 -1.7 3.4 3.4', 'aria-hidden': 'true'}, mark(kind, 0, 0, framed ? 1 : 1.5, framed));
}

/** @param {Closure} closure */
export function closureMark(closure) {
  if (closure.verdict) return closure.verdict;
  return closure.t95 === null ? 'unknown' : 'full';
}
