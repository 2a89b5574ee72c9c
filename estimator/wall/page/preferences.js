// SPDX-License-Identifier: MIT
// What a viewer likes, remembered by the browser. A store that is closed to the page (private windows) costs only
// the memory.
import {UNIT_SETS} from "./units.js";

const KEY = 'holdfast.preferences';

/**
 * @typedef {object} Preferences
 * @property {import('./units.js').UnitChoice} units
 * @property {"auto"|"light"|"dark"} theme
 * @property {boolean} large large figures
 * @property {boolean} sound
 * @property {boolean} keys single keys act
 */

/** @type {Preferences} */
const DEFAULTS = {units: UNIT_SETS[0], theme: 'auto', large: false, sound: false, keys: true};

/** @returns {Preferences} */
export function readPreferences() {
  try {
    const kept = JSON.parse(localStorage.getItem(KEY) ?? '{}');
    return {...DEFAULTS, ...kept, units: {...DEFAULTS.units, ...kept.units}};
  } catch {
    return {...DEFAULTS};
  }
}

/** @param {Preferences} preferences */
export function keepPreferences(preferences) {
  try {
    localStorage.setItem(KEY, JSON.stringify(preferences));
  } catch {
    // Remembered until the page is closed, then.
  }
}

/** Theme and size as attributes that the style sheets read. @param {Preferences} preferences */
export function applyPreferences(preferences) {
  const root = document.documentElement;
  const dark = preferences.theme === 'dark' || (preferences.theme === 'auto' && matchMedia('(prefers-color-scheme: dark)').matches);
  root.dataset.theme = dark ? 'dark' : 'light';
  root.classList.toggle('large', preferences.large);
}
