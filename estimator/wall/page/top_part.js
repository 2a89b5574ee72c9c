// SPDX-License-Identifier: MIT
// The top line: car, source clock, lap, speed, state of both links; the cautions at the foot.
import {clock, age, speedText, fixed} from "./units.js";
import {icon} from "./marks.js";

/** @param {import('./wall.js').Wall} wall @returns {import('./wall.js').Part} */
export function topPart(wall) {
  const node = (/** @type {string} */ id) => /** @type {HTMLElement} */ (document.getElementById(id));
  let shown = '';

  function draw() {
    const {hello, now, series, end} = wall.outing;
    node('car').textContent = hello ? hello.car : '';
    node('car').title = hello ? `${hello.origin}, stream ${hello.stream}` : '';
    node('clock').textContent = clock(series.newest);
    node('lap').textContent = now?.lap === null || now?.lap === undefined ? '–' : fixed(now.lap, 0);
    const speed = series.latest('speed');
    node('speed').textContent = speed === null || wall.pageLink === 'lost' ? '–' : speedText(speed, wall.preferences.units);
    if (hello) node('cautions').textContent = hello.cautions.join(' ');
    drawLink(now, end);
    const lost = node('lost');
    // After the end the program goes away; that is no loss.
    lost.hidden = wall.pageLink !== 'lost' || end !== null;
    lost.textContent = lost.hidden ? '' : `Link lost. Everything here is as of ${clock(series.newest)} source time; trying again.`;
    document.documentElement.classList.toggle('link-lost', !lost.hidden);
  }

  /** @param {typeof wall.outing.now} now @param {typeof wall.outing.end} end */
  function drawLink(now, end) {
    const {mark, words} = linkWords(now, end);
    if (words !== shown) node('link').replaceChildren(icon(mark), words);
    shown = words;
    const l = now?.link;
    node('link').title = l ? `messages ${l.messages ?? 0}, lost ${l.lost ?? 0}, repeated ${l.repeated ?? 0}, out of order ${l.out_of_order ?? 0}, damaged ${l.damaged ?? 0}, restarts ${l.restarts ?? 0}` : '';
  }

  /** @param {typeof wall.outing.now} now @param {typeof wall.outing.end} end */
  function linkWords(now, end) {
    if (end) return {mark: 'full', words: end.complete ? 'ended, complete' : 'ended, incomplete'};
    if (wall.pageLink === 'lost') return {mark: 'distrusted', words: 'link lost'};
    if (wall.pageLink === 'connecting') return {mark: 'unknown', words: 'connecting'};
    if (!wall.outing.hello) return {mark: 'unknown', words: 'waiting for the car'};
    if (now?.link.state === 'silent') return {mark: 'distrusted', words: `car silent ${age(wall.age())}`};
    if (now?.link.state === 'ended') return {mark: 'full', words: 'ended'};
    const lost = now?.link.lost ?? 0;
    return {mark: 'good', words: lost > 0 ? `link up, ${fixed(lost, 0)} lost` : 'link up'};
  }

  return {needs: ['hello', 'history', 'now', 'end', 'link', 'tick', 'preferences'], least_ms: 100, draw};
}
