// SPDX-License-Identifier: MIT
// The keyboard, the help that lists it, and the options. Single keys can be turned off.
import {html} from "./svg.js";
import {UNITS, UNIT_SETS} from "./units.js";
import {railOrder} from "./alarm_part.js";

/** @type {[string, string][]} what the help lists, in its order */
const HELP = [
  ['1 … 6', 'go to Regrowth, Zones, Now, Alarms, Sensors, Traces'],
  ['← →', 'closing before or after (in Traces: move through time)'],
  ['L', 'follow the newest closing'],
  ['A', 'acknowledge the alarm on top'],
  ['+ −', 'in Traces: zoom in or out'],
  [', .', 'in Traces: move the cursor'],
  ['Home', 'in Traces: back to the last minute'],
  ['U', 'next set of units'],
  ['D', 'light, dark, as the machine'],
  ['F', 'large figures'],
  ['S', 'sound for new alarms on or off'],
  ['O', 'options'],
  ['?', 'this help'],
  ['Esc', 'close'],
];

const PARTS = ['regrowth', 'zones', 'now', 'alarms', 'sensors', 'traces'];
const THEMES = /** @type {const} */ (['auto', 'light', 'dark']);

/** @param {import('./wall.js').Wall} wall @param {ReturnType<typeof import('./traces_part.js').tracesPart>} traces */
export function keyboard(wall, traces) {
  const help = /** @type {HTMLDialogElement} */ (document.getElementById('help'));
  const settings = /** @type {HTMLDialogElement} */ (document.getElementById('settings'));
  fillHelp(help);
  const showSettings = () => {
    fillSettings(settings, wall);
    settings.showModal();
  };
  document.getElementById('open-help')?.addEventListener('click', () => help.showModal());
  document.getElementById('open-settings')?.addEventListener('click', showSettings);
  for (const dialog of [help, settings]) {
    dialog.addEventListener('click', (event) => {
      if (event.target === dialog) dialog.close(); // beside the box
    });
  }

  /** @type {Record<string, () => void>} */
  const anywhere = {
    ArrowLeft: () => wall.stepClosing(-1),
    ArrowRight: () => wall.stepClosing(1),
    l: () => wall.choose(null),
    a: () => acknowledgeFirst(wall),
    u: () => wall.prefer({units: nextUnits(wall.preferences.units)}),
    d: () => wall.prefer({theme: THEMES[(THEMES.indexOf(wall.preferences.theme) + 1) % THEMES.length]}),
    f: () => wall.prefer({large: !wall.preferences.large}),
    s: () => wall.prefer({sound: !wall.preferences.sound}),
    o: showSettings,
    '?': () => help.showModal(),
  };
  /** @type {Record<string, () => void>} */
  const inTraces = {
    ArrowLeft: () => traces.pan(-0.25),
    ArrowRight: () => traces.pan(0.25),
    '+': () => traces.zoom(0.5),
    '=': () => traces.zoom(0.5),
    '-': () => traces.zoom(2),
    ',': () => traces.moveCursor(-1),
    '.': () => traces.moveCursor(1),
    Home: () => traces.live(),
  };

  document.addEventListener('keydown', (event) => {
    if (event.ctrlKey || event.metaKey || event.altKey || help.open || settings.open) return;
    const target = /** @type {HTMLElement} */ (event.target);
    if (target.matches('input, select, textarea')) return;
    if (!wall.preferences.keys && event.key !== '?') return;
    const part = PARTS[Number(event.key) - 1];
    const key = event.key.length === 1 ? event.key.toLowerCase() : event.key;
    const act = part ? () => goTo(part) : (target.closest('#traces') && inTraces[key]) || anywhere[key];
    if (!act) return;
    event.preventDefault();
    act();
  });
}

/** @param {string} id */
function goTo(id) {
  const part = document.getElementById(id);
  part?.focus({preventScroll: true});
  const calm = matchMedia('(prefers-reduced-motion: reduce)').matches;
  part?.scrollIntoView({block: 'nearest', behavior: calm ? 'auto' : 'smooth'});
}

/** @param {import('./wall.js').Wall} wall */
function acknowledgeFirst(wall) {
  const first = railOrder(wall.outing.alarms.values()).find((alarm) => !alarm.acknowledged);
  if (first) wall.acknowledge(first.id);
}

/** @param {import('./units.js').UnitChoice} now */
function nextUnits(now) {
  const at = UNIT_SETS.findIndex((set) => JSON.stringify(set) === JSON.stringify(now));
  return {...UNIT_SETS[(at + 1) % UNIT_SETS.length]};
}

/** @param {HTMLDialogElement} dialog */
function fillHelp(dialog) {
  const rows = HELP.map(([keys, what]) => html('tr', {}, html('th', {scope: 'row'}, html('kbd', {}, keys)), html('td', {}, what)));
  dialog.append(
    html('h2', {id: 'help-title'}, 'Keys'),
    html('table', {class: 'help-table'}, html('tbody', {}, ...rows)),
    html('p', {}, 'A value with ± shows one standard uncertainty; bands and whiskers show 95 %. The usual band is where eight of ten closings would lie that are like those before that were not slow; it is wide while they are few. Times are the source’s own. Click a mark in Zones to see that closing; drag in Traces to zoom, double-click to come back.'),
    html('form', {method: 'dialog'}, html('button', {}, 'Close')),
  );
}

/** @param {HTMLDialogElement} dialog @param {import('./wall.js').Wall} wall */
function fillSettings(dialog, wall) {
  const {preferences} = wall;
  /** @param {string} label @param {string[]} options @param {string} value @param {(value: string) => void} act */
  const choice = (label, options, value, act) => {
    const select = html('select', {}, ...options.map((o) => html('option', {value: o, selected: o === value}, o)));
    select.addEventListener('change', () => act(select.value));
    return html('label', {}, html('span', {}, label), select);
  };
  /** @param {string} label @param {"large"|"sound"|"keys"} name */
  const toggle = (label, name) => {
    const box = html('input', {type: 'checkbox', checked: preferences[name]});
    box.addEventListener('change', () => wall.prefer({[name]: box.checked}));
    return html('label', {}, html('span', {}, label), box);
  };
  const unit = (/** @type {"speed"|"force"|"area"} */ kind, /** @type {string} */ label) =>
    choice(label, Object.keys(UNITS[kind]), preferences.units[kind], (value) => wall.prefer({units: {...preferences.units, [kind]: value}}));
  dialog.replaceChildren(
    html('h2', {id: 'settings-title'}, 'Options'),
    unit('speed', 'Speed'),
    unit('force', 'Force'),
    unit('area', 'Area'),
    choice('Colours', [...THEMES], preferences.theme, (value) => wall.prefer({theme: /** @type {any} */ (value)})),
    toggle('Large figures', 'large'),
    toggle('Sound for new alarms', 'sound'),
    toggle('Single keys act', 'keys'),
    html('form', {method: 'dialog'}, html('button', {}, 'Close')),
  );
}
