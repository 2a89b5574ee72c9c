// SPDX-License-Identifier: MIT
// The alarm rail: latched until a person acknowledges; three shelves by severity, the newest burst of each on top, and
// of a burst the alarm that came first. Quiet when nothing is wrong.
import {html} from "./svg.js";
import {icon} from "./marks.js";
import {clock, quantityText} from "./units.js";
import {SEVERITIES} from "./words.js";
import {chime} from "./sound.js";

/** @typedef {import('./protocol.js').Alarm} Alarm */

/** In the order of the rail. @param {Iterable<Alarm>} alarms @returns {Alarm[]} */
export function railOrder(alarms) {
  return [...alarms].sort((a, b) => SEVERITIES[a.severity].rank - SEVERITIES[b.severity].rank || b.burst - a.burst || a.id - b.id);
}

/** How many alarms came in the burst that this one leads; 0 where it leads none. @param {Alarm} alarm @param {Alarm[]} all */
export function burstLed(alarm, all) {
  return alarm.burst === alarm.id ? all.filter((a) => a.burst === alarm.id).length - 1 : 0;
}

/** @param {import('./wall.js').Wall} wall @param {HTMLElement} root @returns {import('./wall.js').Part} */
export function alarmPart(wall, root) {
  const quiet = html('p', {class: 'alarms-quiet'});
  const list = html('ul', {class: 'alarm-list', 'aria-live': 'assertive', 'aria-relevant': 'additions'});
  const pastTitle = html('summary');
  const pastList = html('ul', {class: 'alarm-past'});
  const past = html('details', {class: 'alarm-done'}, pastTitle, pastList);
  root.append(quiet, list, past);
  let newestHeard = -1;

  list.addEventListener('click', (event) => {
    const button = /** @type {Element} */ (event.target).closest('button');
    const id = Number(button?.dataset.id);
    if (button?.dataset.act === 'acknowledge') wall.acknowledge(id);
    if (button?.dataset.act === 'closing') wall.choose(Number(button.dataset.closing));
  });

  function draw() {
    const alarms = [...wall.outing.alarms.values()];
    const open = railOrder(alarms.filter((a) => !a.acknowledged || a.active));
    const waiting = open.filter((a) => !a.acknowledged);
    quiet.hidden = open.length > 0;
    // Before an outing has begun, no alarm is no good news.
    quiet.replaceChildren(...(wall.outing.hello ? [icon('good'), 'Nothing to answer.'] : [icon('unknown'), 'No outing yet.']));
    root.parentElement?.classList.toggle('has-alarms', waiting.length > 0);
    if (root.previousElementSibling) root.previousElementSibling.textContent = waiting.length ? `Alarms: ${waiting.length} to answer` : 'Alarms';
    document.title = waiting.length ? `(${waiting.length}) Holdfast` : 'Holdfast';
    const focused = /** @type {HTMLElement|null} */ (document.activeElement)?.dataset?.id;
    // Only what is new is added, so that it is said aloud once, and the focus stays where it is.
    reconcile(list, open, (alarm) => item(inUnits(alarm, wall.preferences.units), burstLed(alarm, alarms)));
    if (focused && !list.contains(document.activeElement)) /** @type {HTMLElement|null} */ (list.querySelector('button[data-act="acknowledge"]') ?? root.parentElement)?.focus();
    const done = railOrder(alarms.filter((a) => a.acknowledged && !a.active)).sort((a, b) => b.t - a.t);
    past.hidden = done.length === 0;
    pastTitle.textContent = `${done.length} acknowledged and over`;
    reconcile(pastList, done.map((alarm) => inUnits(alarm, wall.preferences.units)), (alarm) => html('li', {'data-key': key(alarm, 0)}, icon(alarm.severity), html('span', {}, `${clock(alarm.t)}  ${alarm.text}`)));
    const newest = Math.max(-1, ...alarms.map((a) => a.id));
    if (wall.preferences.sound && newestHeard >= 0 && newest > newestHeard) {
      const severe = waiting.filter((a) => a.id > newestHeard).some((a) => a.severity === 'high');
      if (waiting.some((a) => a.id > newestHeard)) chime(severe);
    }
    newestHeard = Math.max(0, newest);
  }

  return {needs: ['hello', 'alarms', 'alarm', 'alarm_acknowledged', 'preferences'], draw};
}

/** The program writes newtons; a viewer may like others. @param {Alarm} alarm @param {import('./units.js').UnitChoice} units @returns {Alarm} */
function inUnits(alarm, units) {
  const text = alarm.text.replace(/(\d+) ± (\d+) N\b/, (_, value, sd) => quantityText([Number(value), Number(sd)], units, 'force'));
  return {...alarm, text};
}

/** @param {Alarm} alarm @param {number} followers */
function key(alarm, followers) {
  return [alarm.id, alarm.acknowledged, alarm.active, alarm.times, alarm.text, followers].join('|');
}

/** @param {Alarm} alarm @param {number} followers */
function item(alarm, followers) {
  const word = SEVERITIES[alarm.severity].word;
  const state = alarm.acknowledged ? 'acknowledged, still so' : alarm.active ? 'still so' : 'over by itself';
  const again = alarm.times > 1 ? `, came ${alarm.times} times` : '';
  const first = followers > 0 ? `first of ${followers + 1}` : '';
  // How sure the program is stands beside the time, for a second look.
  const [, words, sure] = /** @type {RegExpExecArray} */ (/^(.*?)(?: \((probability [^()]*)\))?$/s.exec(alarm.text.replace(/ ([±>]) /g, '\u00a0$1\u00a0')));
  return html(
    'li',
    {class: `alarm alarm-${alarm.severity}${alarm.acknowledged ? ' alarm-answered' : ''}`, 'data-key': key(alarm, followers)},
    icon(alarm.severity),
    html(
      'div',
      {class: 'alarm-words'},
      html('p', {}, html('b', {class: 'alarm-severity'}, word), html('span', {class: 'figure'}, clock(alarm.t)), sure ? html('span', {class: 'alarm-sure', title: sure}, sure.replace(/^probability \S+\s/, 'p ')) : null, first ? html('span', {class: 'alarm-first'}, first) : null),
      html('p', {class: 'alarm-text'}, words),
      html('p', {class: 'alarm-state'}, state + again, alarm.closure ? html('button', {type: 'button', class: 'plain', 'data-act': 'closing', 'data-closing': alarm.closure}, `show closing ${alarm.closure}`) : null),
    ),
    alarm.acknowledged ? null : html('button', {type: 'button', class: 'acknowledge', 'data-act': 'acknowledge', 'data-id': alarm.id, 'aria-label': `Seen: ${alarm.text}`}, 'Seen'),
  );
}

/**
 * Makes the list's items those of `wanted`, keeping the nodes of the ones that have not changed.
 * @param {HTMLElement} parent @param {Alarm[]} wanted @param {(alarm: Alarm) => HTMLElement} make
 */
function reconcile(parent, wanted, make) {
  const old = new Map([...parent.children].map((node) => [node.getAttribute('data-key'), node]));
  const nodes = wanted.map((alarm) => {
    const fresh = make(alarm);
    return old.get(fresh.getAttribute('data-key')) ?? fresh;
  });
  const same = nodes.length === parent.children.length && nodes.every((node, i) => node === parent.children[i]);
  if (same) return;
  for (const node of [...parent.children]) if (!nodes.includes(node)) node.remove();
  nodes.forEach((node, i) => {
    if (parent.children[i] !== node) parent.insertBefore(node, parent.children[i] ?? null);
  });
}
