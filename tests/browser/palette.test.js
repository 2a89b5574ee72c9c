// SPDX-License-Identifier: MIT
// The palette, with numbers. Contrast after WCAG 2.1 (definitions of relative luminance and contrast ratio);
// colour blindness after Machado, Oliveira and Fernandes (2009), severity 1, matrices on linear RGB (memory);
// differences in CIELAB, CIE 1976.
import {test} from 'node:test';
import assert from 'node:assert/strict';
import {readFileSync} from 'node:fs';

const css = readFileSync(new URL('../../estimator/wall/page/palette.css', import.meta.url), 'utf8');

/** @param {string} selector @returns {Record<string, string>} */
function palette(selector) {
  const block = css.slice(css.indexOf(`${selector} {`)).split('}')[0];
  return Object.fromEntries([...block.matchAll(/--([a-z-]+): (#[0-9a-f]{6,8});/g)].map((m) => [m[1], m[2]]));
}

/** @param {string} hex @returns {number[]} linear RGB */
function linear(hex) {
  return [1, 3, 5].map((i) => parseInt(hex.slice(i, i + 2), 16) / 255).map((c) => (c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4));
}

/** @param {number[]} rgb */
function luminance(rgb) {
  return 0.2126 * rgb[0] + 0.7152 * rgb[1] + 0.0722 * rgb[2];
}

/** @param {string} a @param {string} b */
function contrast(a, b) {
  const [low, high] = [luminance(linear(a)), luminance(linear(b))].sort((x, y) => x - y);
  return (high + 0.05) / (low + 0.05);
}

const EYES = {
  usual: [1, 0, 0, 0, 1, 0, 0, 0, 1],
  protan: [0.152286, 1.052583, -0.204868, 0.114503, 0.786281, 0.099216, -0.003882, -0.048116, 1.051998],
  deutan: [0.367322, 0.860646, -0.227968, 0.280085, 0.672501, 0.047413, -0.01182, 0.04294, 0.968881],
  tritan: [1.255528, -0.076749, -0.178779, -0.078411, 0.930809, 0.147602, 0.004733, 0.691367, 0.3039],
};

/** @param {string} hex @param {number[]} eye @returns {number[]} CIELAB, D65 */
function lab(hex, eye) {
  const rgb = linear(hex);
  const [r, g, b] = [0, 1, 2].map((i) => Math.max(0, Math.min(1, eye[3 * i] * rgb[0] + eye[3 * i + 1] * rgb[1] + eye[3 * i + 2] * rgb[2])));
  const xyz = [(0.4124 * r + 0.3576 * g + 0.1805 * b) / 0.9505, 0.2126 * r + 0.7152 * g + 0.0722 * b, (0.0193 * r + 0.1192 * g + 0.9505 * b) / 1.089];
  const [x, y, z] = xyz.map((v) => (v > 0.008856 ? Math.cbrt(v) : 7.787 * v + 16 / 116));
  return [116 * y - 16, 500 * (x - y), 200 * (y - z)];
}

/** @param {string} a @param {string} b @param {number[]} eye */
function difference(a, b, eye) {
  const [p, q] = [lab(a, eye), lab(b, eye)];
  return Math.hypot(p[0] - q[0], p[1] - q[1], p[2] - q[2]);
}

const LIGHT = palette(':root');
const THEMES = {light: LIGHT, dark: {...LIGHT, ...palette(':root[data-theme="dark"]')}};
const GROUNDS = ['ground', 'panel', 'bad-ground', 'slow-ground', 'good-ground', 'unknown-ground'];
// Told apart by colour beside shape and word: what happened at the brakes, and the lines of one plot.
const APART = [
  ['full', 'short', 'slow', 'unclear'],
  ['flow', 'second', 'third'],
  ['flow', 'usual', 'brake'],
];

for (const [name, colours] of Object.entries(THEMES)) {
  test(`${name}: text 4.5:1 on every ground`, () => {
    for (const text of ['ink', 'quiet']) {
      for (const ground of GROUNDS) {
        const ratio = contrast(colours[text], colours[ground]);
        assert.ok(ratio >= 4.5, `${text} on ${ground}: ${ratio.toFixed(2)}`);
      }
    }
    assert.ok(contrast(colours['on-strong'], colours.short) >= 4.5);
    assert.ok(contrast(colours.brake, colours.panel) >= 4.5, 'words in the brakes’ colour');
    assert.ok(contrast(colours.unclear, colours.panel) >= 4.5, 'the word unknown');
  });

  test(`${name}: marks 3:1 on every ground`, () => {
    for (const mark of ['flow', 'second', 'third', 'usual', 'brake', 'full', 'short', 'slow', 'unclear', 'edge', 'focus']) {
      for (const ground of GROUNDS.filter((g) => mark !== 'usual' || g === 'panel')) {
        const ratio = contrast(colours[mark], colours[ground]);
        assert.ok(ratio >= 3, `${mark} on ${ground}: ${ratio.toFixed(2)}`);
      }
    }
  });

  test(`${name}: kinds apart for usual and colour-blind eyes`, () => {
    for (const [kind, eye] of Object.entries(EYES)) {
      for (const set of APART) {
        for (const [i, a] of set.entries()) {
          for (const b of set.slice(i + 1)) {
            const apart = difference(colours[a], colours[b], eye);
            assert.ok(apart >= 15, `${a} and ${b}, ${kind}: ${apart.toFixed(1)}`);
          }
        }
      }
    }
  });
}
