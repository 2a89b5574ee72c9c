// SPDX-License-Identifier: MIT
// Numbers as people read them: units that can be switched, and rounding that follows the uncertainty.

/** @typedef {{word: string, per_si: number}} Unit */

/** @type {Record<"speed"|"force"|"area", Record<string, Unit>>} exact factors from the units' definitions */
export const UNITS = {
  speed: {
    'm/s': {word: 'm/s', per_si: 1},
    'km/h': {word: 'km/h', per_si: 3.6},
    mph: {word: 'mph', per_si: 3600 / 1609.344},
  },
  force: {
    N: {word: 'N', per_si: 1},
    kN: {word: 'kN', per_si: 1e-3},
    lbf: {word: 'lbf', per_si: 1 / 4.4482216152605},
    kgf: {word: 'kgf', per_si: 1 / 9.80665},
  },
  area: {
    'm²': {word: 'm²', per_si: 1},
    'ft²': {word: 'ft²', per_si: 1 / 0.09290304},
  },
};

/** Sets that the key U goes through. */
export const UNIT_SETS = [
  {speed: 'm/s', force: 'N', area: 'm²'},
  {speed: 'km/h', force: 'N', area: 'm²'},
  {speed: 'mph', force: 'lbf', area: 'ft²'},
];

/** @typedef {{speed: string, force: string, area: string}} UnitChoice */

/** @param {UnitChoice} choice @param {"speed"|"force"|"area"} kind @returns {Unit} */
export function unitOf(choice, kind) {
  return UNITS[kind][choice[kind]] ?? Object.values(UNITS[kind])[0];
}

/** A number with thin spaces between thousands and a true minus. @param {number} value @param {number} decimals */
export function fixed(value, decimals) {
  const [whole, part] = Math.abs(value).toFixed(decimals).split('.');
  const grouped = whole.length > 4 ? whole.replace(/\B(?=(\d{3})+$)/g, '\u2009') : whole;
  const text = part ? `${grouped}.${part}` : grouped;
  return value < 0 && Number(value.toFixed(decimals)) !== 0 ? `\u2212${text}` : text;
}

/** Decimals that show two figures of the uncertainty, within what is sensible. @param {number} sd @param {number} most */
export function decimalsFor(sd, most) {
  if (!(sd > 0)) return most;
  // 0.995 and more is written as 1.0.
  return Math.max(0, Math.min(most, 1 - Math.floor(Math.log10(sd) + 0.00218)));
}

/** "1703 ± 175", both with the decimals that the uncertainty deserves. @param {number} value @param {number} sd @param {number} most */
export function plusMinus(value, sd, most) {
  const decimals = decimalsFor(sd, most);
  return `${fixed(value, decimals)}\u00a0±\u00a0${fixed(sd, decimals)}`;
}

/** @param {import('./protocol.js').Quantity} q @param {UnitChoice} choice @param {"speed"|"force"|"area"} kind */
export function quantityText(q, choice, kind) {
  const unit = unitOf(choice, kind);
  return `${plusMinus(q[0] * unit.per_si, q[1] * unit.per_si, kind === 'force' ? (choice.force === 'kN' ? 3 : 0) : 3)} ${unit.word}`;
}

/** @param {number} speed m/s @param {UnitChoice} choice */
export function speedText(speed, choice) {
  const unit = unitOf(choice, 'speed');
  return `${fixed(speed * unit.per_si, unit.word === 'm/s' ? 1 : 0)} ${unit.word}`;
}

/** Source time as minutes and seconds: 163.64 is "2:43.6". @param {number} t s @param {number} [decimals] */
export function clock(t, decimals = 1) {
  if (!Number.isFinite(t)) return '–:––';
  const sign = t < 0 ? '\u2212' : '';
  const scale = 10 ** decimals;
  const rounded = Math.round(Math.abs(t) * scale) / scale;
  const minutes = Math.floor(rounded / 60);
  const seconds = (rounded - minutes * 60).toFixed(decimals).padStart(decimals ? 3 + decimals : 2, '0');
  if (minutes < 60) return `${sign}${minutes}:${seconds}`;
  return `${sign}${Math.floor(minutes / 60)}:${String(minutes % 60).padStart(2, '0')}:${seconds}`;
}

/** A probability to two figures, and never as a certainty. @param {number} p */
export function probabilityText(p) {
  return p > 0.99 ? '> 0.99' : p < 0.01 ? '< 0.01' : fixed(p, 2);
}

/** Of milliseconds, without a dash that a minus would run into. @param {number} from s @param {number} to s */
export function msRange(from, to) {
  return `${fixed(from * 1000, 0)}${from < 0 || to < 0 ? ' to ' : '–'}${fixed(to * 1000, 0)}`;
}

/** A short span: milliseconds below a second, else seconds. @param {number} s */
export function span(s) {
  return Math.abs(s) < 0.9995 ? `${fixed(s * 1000, 0)} ms` : `${fixed(s, 2)} s`;
}

/** An age that is read at a glance. @param {number} s */
export function age(s) {
  if (s < 0.95) return `${fixed(Math.max(0, s), 1)} s`;
  if (s < 90) return `${fixed(s, 0)} s`;
  return `${fixed(s / 60, 0)} min`;
}
