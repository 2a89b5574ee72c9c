// SPDX-License-Identifier: MIT
// A short sound for a new alarm, off unless the viewer turned it on: two rising tones for "act", one for the rest.

/** @type {AudioContext|null} */
let audio = null;

/** @param {boolean} severe */
export function chime(severe) {
  audio ??= new AudioContext();
  const tones = severe ? [587, 880, 587, 880] : [587];
  tones.forEach((frequency_hz, i) => tone(/** @type {AudioContext} */ (audio), frequency_hz, i * 0.16));
}

/** @param {AudioContext} context @param {number} frequency_hz @param {number} after_s */
function tone(context, frequency_hz, after_s) {
  const begin = context.currentTime + after_s;
  const oscillator = new OscillatorNode(context, {frequency: frequency_hz, type: 'triangle'});
  const gain = new GainNode(context, {gain: 0});
  // Faded in and out, for a hard edge clicks.
  gain.gain.setValueAtTime(0, begin);
  gain.gain.linearRampToValueAtTime(0.25, begin + 0.02);
  gain.gain.linearRampToValueAtTime(0, begin + 0.14);
  oscillator.connect(gain).connect(context.destination);
  oscillator.start(begin);
  oscillator.stop(begin + 0.15);
}
