// SPDX-License-Identifier: MIT
// The report of an outing: the messages that a viewer of the page would have had, drawn by the same modules.
import {Outing} from "./outing.js";
import {html} from "./svg.js";
import {UNIT_SETS} from "./units.js";
import {threeSentences} from "./sentences.js";
import {dataSection} from "./report_data.js";
import {zonesSection} from "./report_zones.js";
import {closuresSection} from "./report_closings.js";
import {alarmsSection, areasSection, sensorsSection, settingsSection} from "./report_tables.js";
import {tracesSection} from "./report_traces.js";

const UNITS = UNIT_SETS[0];

const outing = new Outing();
const text = document.getElementById('outing')?.textContent || '{"messages":[]}';
for (const message of JSON.parse(text).messages) outing.apply(message);

const report = /** @type {HTMLElement} */ (document.getElementById('report'));
document.title = `Holdfast report: ${outing.hello?.car ?? 'no outing'}`;
report.replaceChildren(
  html('h1', {}, `Flap closings of ${outing.hello?.car ?? 'no outing'}`),
  html('p', {class: 'quiet'}, 'Estimates with uncertainties, for a competent engineer to weigh. This is no safety device; the cautions stand at the end.'),
  dataSection(outing, UNITS),
  html('section', {}, html('h2', {}, 'The answer'), html('p', {class: 'answer'}, threeSentences(outing, UNITS).join(' '))),
  zonesSection(outing, UNITS),
  closuresSection(outing, UNITS),
  alarmsSection(outing),
  areasSection(outing, UNITS),
);
report.append(tracesSection(outing, UNITS, report), sensorsSection(outing, UNITS), settingsSection(outing), cautionsSection());

function cautionsSection() {
  const cautions = (outing.hello?.cautions ?? []).map((caution) => html('p', {}, caution));
  return html('section', {class: 'cautions'}, html('h2', {}, 'Cautions'), ...cautions);
}
