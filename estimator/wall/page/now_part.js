// SPDX-License-Identifier: MIT
// Now: downforce at each axle, drag area, balance; each with its interval and age, or "unknown" and why.
import {html} from "./svg.js";
import {plusMinus, unitOf, age} from "./units.js";
import {remarks, unknownReason} from "./words.js";

/** @typedef {import('./protocol.js').Quantity} Quantity */
/** @typedef {import('./series.js').Series} Series */

/** @param {Series} series @param {string} name @returns {Quantity|null} */
function quantity(series, name) {
  const value = series.latest(name);
  const sd = series.latest(`${name}_sd`);
  return value === null || sd === null ? null : [value, sd];
}

/**
 * Front share of the downforce; the axles' errors are taken as independent.
 * @param {Quantity|null} front @param {Quantity|null} rear @returns {Quantity|null}
 */
export function balance(front, rear) {
  if (!front || !rear) return null;
  const sum = front[0] + rear[0];
  if (!(sum > 0)) return null;
  return [front[0] / sum, Math.hypot(rear[0] * front[1], front[0] * rear[1]) / (sum * sum)];
}

/** @param {import('./wall.js').Wall} wall @param {HTMLElement} root @returns {import('./wall.js').Part} */
export function nowPart(wall, root) {
  const cell = (/** @type {string} */ id, /** @type {string} */ title) => {
    const value = html('span', {class: 'figure now-value', id: `now-${id}`});
    const spread = html('span', {class: 'now-spread'});
    const when = html('span', {class: 'now-age'});
    const last = html('span', {class: 'now-age now-last'});
    root.append(html('div', {class: 'now-cell'}, html('p', {class: 'now-head'}, html('span', {class: 'now-title'}, title), when), value, spread, last));
    return {value, spread, when, last};
  };
  const front = cell('front', 'Downforce front');
  const rear = cell('rear', 'Downforce rear');
  const drag = cell('drag', 'Drag area');
  const share = cell('balance', 'Balance, front');
  const remark = html('p', {class: 'now-remark'});
  root.append(remark);

  /**
   * @param {ReturnType<typeof cell>} c @param {Quantity|null} q @param {number} factor @param {string} unit
   * @param {number} most decimals @param {string} column that tells the age
   */
  function show(c, q, factor, unit, most, column) {
    const why = wall.whyUnknown();
    if (why === null && q) {
      const [value, sd] = plusMinus(q[0] * factor, q[1] * factor, most).split(/\s±\s/);
      c.value.textContent = value;
      c.spread.textContent = `± ${sd} ${unit}`;
      c.when.textContent = `${age(wall.age())} old`;
      c.last.textContent = '';
      return;
    }
    c.value.textContent = 'unknown';
    c.spread.textContent = why ?? 'not estimated';
    const {series, now, end} = wall.outing;
    const known = series.lastKnown(column);
    c.when.textContent = '';
    if (known === null || now?.flags.includes('not_converged')) c.last.textContent = ''; // never was
    else if (q && unknownReason(now?.flags ?? []) === null) {
      // Nothing was amiss with the last one but its age.
      const value = `${plusMinus(q[0] * factor, q[1] * factor, most)} ${unit}`;
      c.last.textContent = end ? `last: ${value}` : `${value} ${age(series.newest - known + wall.age())} ago`;
    } else c.last.textContent = `last known ${age(series.newest - known + wall.age())} ago`;
  }

  function draw() {
    const {series, now} = wall.outing;
    const units = wall.preferences.units;
    const force = unitOf(units, 'force');
    const area = unitOf(units, 'area');
    const decimals = force.word === 'kN' ? 3 : 0;
    const downFront = quantity(series, 'downforce_front');
    const downRear = quantity(series, 'downforce_rear');
    show(front, downFront, force.per_si, force.word, decimals, 'downforce_front');
    show(rear, downRear, force.per_si, force.word, decimals, 'downforce_rear');
    show(drag, quantity(series, 'cda'), area.per_si, area.word, 3, 'cda');
    show(share, balance(downFront, downRear), 100, '%', 1, 'downforce_front');
    const known = wall.whyUnknown() === null;
    root.classList.toggle('now-unknown', !known);
    remark.textContent = known && now ? remarks(now.flags).join('; ') : '';
  }

  return {needs: ['hello', 'history', 'now', 'end', 'link', 'tick', 'preferences'], least_ms: 100, draw};
}
