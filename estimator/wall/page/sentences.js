// SPDX-License-Identifier: MIT
// The answer in three sentences, made from the numbers.
import {plusMinus, quantityText, fixed} from "./units.js";
import {timesUsual} from "./usual.js";

/** @typedef {import('./protocol.js').Closure} Closure */
/** @typedef {import('./outing.js').Outing} Outing */

/** "1 closing", "2 closings". @param {number} n @param {string} noun */
function counted(n, noun) {
  return `${n} ${noun}${n === 1 ? '' : 's'}`;
}

/** @param {Outing} outing @param {import('./units.js').UnitChoice} units @returns {string[]} */
export function threeSentences(outing, units) {
  const closures = outing.closuresInOrder();
  if (closures.length === 0) return ['The flap did not close in this outing.'];
  return [verdicts(closures), pace(outing, closures), shortfall(closures, units)];
}

/** @param {Closure[]} closures */
function verdicts(closures) {
  const zones = new Set(closures.map((c) => c.zone).filter((zone) => zone > 0)).size;
  const parts = ['full', 'short', 'unclear'].map((verdict) => `${closures.filter((c) => c.verdict === verdict).length} ${verdict}`);
  const unbraked = closures.filter((c) => c.verdict === null).length;
  if (unbraked) parts.push(`${unbraked} without braking`);
  return `${counted(closures.length, 'closing')} in ${counted(zones, 'zone')}: ${parts.join(', ')}.`;
}

/** @param {Outing} outing @param {Closure[]} closures */
function pace(outing, closures) {
  const slow = closures.filter((c) => c.slow);
  const part = closures.filter((c) => !c.whole);
  const settled = part.length
    ? ` ${counted(part.length, 'closing')} (${part.map((c) => c.number).join(', ')}) settled short of whole, the lowest at ${fixed(100 * Math.min(...part.map((c) => c.plateau ?? 1)), 0)} % of the flap’s downforce.`
    : '';
  const timed = slow.filter((c) => c.whole).map((c) => ({c, times: timesUsual(outing, c, Infinity)}));
  const worst = timed.filter((x) => x.times !== null).sort((a, b) => (b.times?.factor ?? 0) - (a.times?.factor ?? 0))[0];
  if (worst?.times) {
    const {c, times} = worst;
    const whose = times.of === 'zone' ? 'that zone’s' : 'the car’s';
    return `Closing ${c.number} (lap ${c.lap}, zone ${c.zone}) was the slowest, ${plusMinus(times.factor, times.sd, 1)} times ${whose} usual; ${counted(slow.length, 'closing')} flagged slow in all (${slow.map((x) => x.number).join(', ')}).${settled}`;
  }
  if (slow.length) return `${counted(slow.length, 'closing')} flagged slow (${slow.map((c) => c.number).join(', ')}).${settled}`;
  if (!closures.some((c) => c.usual_known)) return 'None was slow by what is usual for such flaps; too few closings had come before to know what is usual for this car.';
  return 'None was slower than the car’s usual by more than the limit.';
}

/** @param {Closure[]} closures @param {import('./units.js').UnitChoice} units */
function shortfall(closures, units) {
  const judged = closures.filter((c) => c.shortfall !== null);
  if (judged.length === 0) return 'What was missing at the brakes is not known for any of them.';
  const missing = (/** @type {Closure} */ c) => /** @type {[number, number]} */ (c.shortfall)[0];
  const worst = judged.reduce((a, b) => (missing(b) > missing(a) ? b : a));
  const share = worst.shortfall_share === null ? '' : `, ${fixed(100 * worst.shortfall_share, 1)} % of the rear downforce`;
  return `The most missing as the brakes came on was ${quantityText(/** @type {any} */ (worst.shortfall), units, 'force')}${share}: closing ${worst.number}, lap ${worst.lap}, zone ${worst.zone}, judged ${worst.verdict}.`;
}
