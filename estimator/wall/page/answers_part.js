// SPDX-License-Identifier: MIT
// The two seconds: is the flow back, was it slower than usual, what is wrong with the sensors.
import {html} from "./svg.js";
import {icon} from "./marks.js";
import {flowAnswer, paceAnswer, sensorAnswer, percent, closingName} from "./words.js";
import {fixed} from "./units.js";
import {valueAt} from "./curve.js";

/** @typedef {import('./words.js').Answer} Answer */

/** @param {import('./wall.js').Wall} wall @param {HTMLElement} root @returns {import('./wall.js').Part} */
export function answersPart(wall, root) {
  const cells = ['Is the flow back?', 'Slower than usual?', 'Sensors all right?'].map((question) => {
    const mark = html('span', {class: 'answer-mark'});
    const word = html('strong', {class: 'answer-word'});
    const detail = html('span', {class: 'answer-detail'});
    const of = html('span', {class: 'answer-of'});
    const title = html('span', {class: 'answer-question'}, html('span', {class: 'question'}, question), of);
    const cell = html('div', {class: 'answer'}, mark, html('p', {}, title, word, detail));
    return {cell, mark, word, detail, of, shown: ''};
  });
  root.append(...cells.map((c) => c.cell));
  // Said aloud once the closing is judged; while it grows only the eye follows.
  const aloud = html('p', {class: 'aloud', role: 'status'});
  root.append(aloud);

  /** @param {number} i @param {Answer} answer @param {string} [of] */
  function show(i, answer, of = '') {
    const c = cells[i];
    const key = JSON.stringify([answer, of]);
    if (key === c.shown) return;
    c.shown = key;
    c.cell.className = `answer answer-${answer.mark}`;
    c.mark.replaceChildren(icon(answer.mark));
    c.word.textContent = answer.word;
    c.detail.textContent = answer.detail;
    c.of.textContent = of && ` ${of}`;
    c.cell.classList.toggle('answer-named', of !== '');
  }

  function draw() {
    const {outing, preferences} = wall;
    const number = wall.closing();
    const closure = outing.closures.get(number);
    const regrowth = outing.regrowths.get(number);
    if (closure) {
      const flow = flowAnswer(closure, preferences.units);
      const pace = paceAnswer(outing, closure);
      show(0, flow, (wall.chosen === null ? '' : 'earlier: ') + closingName(closure));
      show(1, pace);
      const words = `${closingName(closure)}: ${flow.word}, ${flow.detail}. ${pace.word}.`;
      if (aloud.textContent !== words) aloud.textContent = words;
    } else if (regrowth) {
      const [share, low, high] = [regrowth.share, regrowth.low, regrowth.high].map((curve) => valueAt(regrowth.t, curve, regrowth.known_until));
      const known = Number.isFinite(share);
      show(0, {mark: 'growing', word: known ? `${percent(share)} back` : 'Flap closing', detail: known ? `${fixed(low * 100, 0)}–${percent(high)}, growing; not judged yet` : 'not judged yet'}, `closing ${number}`);
      show(1, {mark: 'growing', word: '…', detail: 'known when the closing is judged'});
    } else {
      const [word, detail] = outing.hello ? ['No closing yet', 'the flap has not closed in this outing'] : ['No outing yet', 'nothing has come from the car'];
      show(0, {mark: 'unknown', word, detail});
      show(1, {mark: 'unknown', word: '–', detail: 'no closing to compare'});
    }
    show(2, sensors());
  }

  /** @returns {Answer} */
  function sensors() {
    if (wall.pageLink === 'lost' && !wall.outing.end) return {mark: 'unknown', word: 'Unknown', detail: 'link lost'};
    if (wall.outing.now?.link.state === 'silent') return {mark: 'unknown', word: 'No data', detail: 'nothing comes from the car'};
    return sensorAnswer(wall.outing.health);
  }

  return {needs: ['hello', 'closures', 'closure', 'regrowths', 'regrowth', 'health', 'now', 'end', 'chosen', 'link', 'preferences'], draw};
}
