// SPDX-License-Identifier: MIT
// Zones of the report: each with its margins lap by lap and the regrowth of its worst closing.
import {html} from "./svg.js";
import {fixed} from "./units.js";
import {icon} from "./marks.js";
import {closingName, flowAnswer} from "./words.js";
import {usualBand, usualMargin} from "./usual.js";
import {zonePicture, zoneRanges} from "./zone_picture.js";
import {regrowthPicture} from "./regrowth_picture.js";

/** @typedef {import('./protocol.js').Closure} Closure */

const EM = 10;
const SHEET = {margins: {width: 190, height: 152}, regrowth: {width: 480, height: 152}};
const PHONE = {margins: {width: 330, height: 150}, regrowth: {width: 330, height: 200}};

/** The closing that most was missing from. @param {Closure[]} closures */
export function worstOf(closures) {
  return closures.reduce((a, b) => ((b.shortfall?.[0] ?? -Infinity) > (a.shortfall?.[0] ?? -Infinity) ? b : a));
}

/** @param {import('./outing.js').Outing} outing @param {import('./units.js').UnitChoice} units */
export function zonesSection(outing, units) {
  const closures = outing.closuresInOrder().filter((c) => c.zone > 0);
  const zones = [...new Set(closures.map((c) => c.zone))].sort((a, b) => a - b);
  const ranges = zoneRanges(closures);
  const section = html('section', {}, html('h2', {}, 'Zones'));
  if (zones.length === 0) section.append(html('p', {}, 'No closing was followed by braking.'));
  else section.append(markKey());
  for (const zone of zones) section.append(zoneReport(outing, zone, closures.filter((c) => c.zone === zone), ranges, units));
  return section;
}

function markKey() {
  const marks = [['full', 'full'], ['short', 'short'], ['unclear', 'unclear']].map(([mark, word]) => html('span', {}, icon(mark), ` ${word}`));
  return html(
    'p',
    {class: 'key-marks quiet'},
    ...marks,
    html('span', {}, icon('full', true), ' framed: slow'),
    html('span', {}, 'whiskers, bands 95 %; ± one standard uncertainty; hatched, dashed: usual (eight of ten like those not slow)'),
  );
}

/**
 * @param {import('./outing.js').Outing} outing @param {number} zone @param {Closure[]} of
 * @param {ReturnType<typeof zoneRanges>} ranges @param {import('./units.js').UnitChoice} units
 */
function zoneReport(outing, zone, of, ranges, units) {
  const worst = worstOf(of);
  const size = matchMedia('screen and (max-width: 48rem)').matches ? PHONE : SHEET;
  // All of the outing's closings that were not slow: a report looks back.
  const usual = usualMargin(outing, zone, Infinity);
  const sum = usual
    ? `usual margin ${fixed(usual.middle * 1000, 0)} ms (eight of ten within ${fixed((usual.middle - usual.half) * 1000, 0)} to ${fixed((usual.middle + usual.half) * 1000, 0)})`
    : 'usual margin not known: too few closings that were not slow';
  const margins = zonePicture({zone, closures: of, ranges, usual, chosen: 0, ...size.margins, em: EM});
  const pair = html('div', {class: 'zone-pair'}, html('figure', {}, margins, html('figcaption', {}, 'Margin to the brakes, s, by lap')));
  const regrowth = outing.regrowths.get(worst.number);
  if (regrowth) {
    const flow = flowAnswer(worst, units);
    const band = usualBand(outing, zone, Infinity, regrowth.chord_time);
    const picture = regrowthPicture({regrowth, closure: worst, usual: band, units, ...size.regrowth, em: EM});
    pair.append(html('figure', {}, picture, html('figcaption', {}, `Most missing: ${closingName(worst)}; ${flow.word.toLowerCase()}, ${flow.detail}`)));
  }
  return html('div', {class: 'zone-report'}, html('h3', {}, `Zone ${zone}: ${of.length} closing${of.length === 1 ? '' : 's'}, ${sum}`), pair);
}
