// SPDX-License-Identifier: MIT
// Regrowth: the picture of the newest closing, or of one that was chosen.
import {html} from "./svg.js";
import {measure} from "./wall.js";
import {closingName} from "./words.js";
import {usualBand, usualWords} from "./usual.js";
import {regrowthPicture} from "./regrowth_picture.js";
import {speedText, clock} from "./units.js";

/** @param {import('./wall.js').Wall} wall @param {HTMLElement} root @returns {import('./wall.js').Part} */
export function regrowthPart(wall, root) {
  const back = html('button', {type: 'button', 'aria-label': 'closing before', 'aria-keyshortcuts': 'ArrowLeft'}, '‹');
  const on = html('button', {type: 'button', 'aria-label': 'closing after', 'aria-keyshortcuts': 'ArrowRight'}, '›');
  const follow = html('button', {type: 'button', class: 'follow', 'aria-keyshortcuts': 'l'}, 'newest');
  const name = html('span', {class: 'closing-name'});
  const usualKey = html('span', {class: 'key key-usual'});
  const keys = html(
    'p',
    {class: 'keys'},
    html('span', {class: 'key key-own'}, 'this closing, 95 % band'),
    html('span', {class: 'key key-expected'}, 'expected'),
    usualKey,
    html('span', {class: 'key key-brake'}, 'brakes'),
  );
  const canvas = html('div', {class: 'canvas'});
  root.append(html('div', {class: 'bar'}, html('div', {class: 'stepper'}, back, name, on, follow), keys), canvas);
  back.addEventListener('click', () => wall.stepClosing(-1));
  on.addEventListener('click', () => wall.stepClosing(1));
  follow.addEventListener('click', () => wall.choose(null));

  function draw() {
    const {outing} = wall;
    const number = wall.closing();
    const numbers = outing.closingNumbers();
    const regrowth = outing.regrowths.get(number);
    const closure = outing.closures.get(number);
    back.disabled = numbers.indexOf(number) <= 0;
    on.disabled = numbers.indexOf(number) >= numbers.length - 1;
    follow.setAttribute('aria-pressed', String(wall.chosen === null));
    name.textContent = closure ? `${closingName(closure)}, ${clock(closure.time_command)}, ${speedText(closure.speed, wall.preferences.units)}` : number ? `closing ${number}` : '';
    if (!regrowth) {
      keys.hidden = true;
      canvas.replaceChildren(html('p', {class: 'empty'}, number ? 'No curve came for this closing.' : 'The first closing of the flap will grow here.'));
      return;
    }
    keys.hidden = false;
    const usual = usualBand(outing, closure?.zone ?? regrowth.zone, number, regrowth.chord_time);
    usualKey.textContent = usualWords(usual);
    usualKey.classList.toggle('key-none', usual.share.length === 0);
    canvas.replaceChildren(regrowthPicture({regrowth, closure, usual, units: wall.preferences.units, ...measure(canvas)}));
  }

  return {needs: ['hello', 'closures', 'closure', 'regrowths', 'regrowth', 'chosen', 'preferences', 'size'], draw};
}
