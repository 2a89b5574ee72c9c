// SPDX-License-Identifier: MIT
// Elements without a template language: SVG and HTML nodes made in one call. Colours come from classes, so a change
// of theme redraws nothing; no style attribute is written, which the page's content-security policy forbids.

const SVG = 'http://www.w3.org/2000/svg';

/** @typedef {Record<string, string|number|boolean|null|undefined>} Attributes */

/** @param {Element} node @param {Attributes} attributes @param {(Node|string|null)[]} children */
function fill(node, attributes, children) {
  for (const [name, value] of Object.entries(attributes)) {
    if (value !== null && value !== undefined && value !== false) node.setAttribute(name, value === true ? '' : String(value));
  }
  for (const child of children) if (child !== null) node.append(child);
}

/** @param {string} name @param {Attributes} [attributes] @param {...(Node|string|null)} children @returns {SVGElement} */
export function svg(name, attributes = {}, ...children) {
  const node = document.createElementNS(SVG, name);
  fill(node, attributes, children);
  return node;
}

/**
 * @template {keyof HTMLElementTagNameMap} K
 * @param {K} name @param {Attributes} [attributes] @param {...(Node|string|null)} children
 * @returns {HTMLElementTagNameMap[K]}
 */
export function html(name, attributes = {}, ...children) {
  const node = document.createElement(name);
  fill(node, attributes, children);
  return node;
}

/** Path through points; starts anew after a gap. @param {number[]} x @param {number[]} y */
export function linePath(x, y) {
  let path = '';
  let pen = 'M';
  x.forEach((at, i) => {
    if (!Number.isFinite(y[i])) {
      pen = 'M';
      return;
    }
    path += `${pen}${at.toFixed(1)} ${y[i].toFixed(1)}`;
    pen = 'L';
  });
  return path;
}

/** Closed path between two lines. @param {number[]} x @param {number[]} low @param {number[]} high */
export function bandPath(x, low, high) {
  const known = x.map((_, i) => i).filter((i) => Number.isFinite(low[i]) && Number.isFinite(high[i]));
  if (known.length < 2) return '';
  const there = known.map((i) => `${x[i].toFixed(1)} ${high[i].toFixed(1)}`);
  const back = known.reverse().map((i) => `${x[i].toFixed(1)} ${low[i].toFixed(1)}`);
  return `M${there.join('L')}L${back.join('L')}Z`;
}

/** A linear scale. @param {number} from @param {number} to @param {number} at0 @param {number} at1 */
export function scale(from, to, at0, at1) {
  const slope = (at1 - at0) / (to - from || 1);
  return (/** @type {number} */ value) => at0 + (value - from) * slope;
}

/** Round steps for an axis, at most `most` of them. @param {number} from @param {number} to @param {number} most */
export function ticks(from, to, most) {
  const rough = (to - from) / Math.max(1, most);
  const power = 10 ** Math.floor(Math.log10(rough));
  const step = [1, 2, 5, 10].map((m) => m * power).find((s) => s >= rough * 0.999) ?? power * 10;
  const out = [];
  for (let k = Math.ceil(from / step - 1e-9); k * step <= to + step * 1e-9; k += 1) out.push(Number((k * step).toPrecision(12)));
  return out;
}

let patterns = 0;

/** A name for a pattern that no other picture of the page has. */
export function freshId() {
  patterns += 1;
  return `pattern-${patterns}`;
}
