// SPDX-License-Identifier: MIT
// Zones: one small picture for each braking zone.
import {html} from "./svg.js";
import {measure} from "./wall.js";
import {icon} from "./marks.js";
import {zonePicture, zoneRanges} from "./zone_picture.js";
import {usualMargin} from "./usual.js";

/** @param {import('./wall.js').Wall} wall @param {HTMLElement} root @returns {import('./wall.js').Part} */
export function zonesPart(wall, root) {
  const key = html(
    'p',
    {class: 'keys'},
    html('span', {class: 'axis-words'}, 'margin to the brakes, s, by lap; whisker 95 %'),
    ...[['full', 'full'], ['short', 'short'], ['unclear', 'unclear']].map(([mark, word]) => html('span', {class: 'key-mark'}, icon(mark), word)),
    html('span', {class: 'key-mark'}, icon('full', true), 'framed: slow'),
    html('span', {class: 'key key-zone-usual'}, 'usual'),
  );
  const row = html('div', {class: 'zone-row'});
  root.append(key, row);
  row.addEventListener('click', (event) => {
    const group = /** @type {Element} */ (event.target).closest('[data-closing]');
    if (group) wall.choose(Number(group.getAttribute('data-closing')));
  });

  function draw() {
    const closures = wall.outing.closuresInOrder().filter((c) => c.zone > 0);
    const zones = [...new Set(closures.map((c) => c.zone))].sort((a, b) => a - b);
    key.hidden = zones.length === 0;
    if (zones.length === 0) {
      row.replaceChildren(html('p', {class: 'empty'}, 'Each braking zone gets its picture with its first closing.'));
      return;
    }
    const cells = zones.map((zone) => {
      const of = closures.filter((c) => c.zone === zone);
      const count = (/** @type {(c: import('./protocol.js').Closure) => boolean} */ test) => of.filter(test).length;
      const sum = [`${of.length}×`, count((c) => c.verdict === 'short') ? `${count((c) => c.verdict === 'short')} short` : '', count((c) => c.slow) ? `${count((c) => c.slow)} slow` : ''];
      const canvas = html('div', {class: 'canvas'});
      const cell = html('figure', {class: 'zone'}, html('figcaption', {}, html('b', {}, `Zone ${zone}`), ` ${sum.filter(Boolean).join(', ')}`), canvas);
      return {zone, of, canvas, cell};
    });
    row.replaceChildren(...cells.map((c) => c.cell));
    const ranges = zoneRanges(closures);
    const chosen = wall.closing();
    const sizes = cells.map((c) => measure(c.canvas));
    cells.forEach((c, i) => c.canvas.append(zonePicture({zone: c.zone, closures: c.of, ranges, usual: usualMargin(wall.outing, c.zone, chosen), chosen, ...sizes[i]})));
  }

  return {needs: ['hello', 'closures', 'closure', 'chosen', 'preferences', 'size'], least_ms: 50, draw};
}
