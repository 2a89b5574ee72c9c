// SPDX-License-Identifier: MIT
// Starts the page: the link feeds the outing, the outing marks parts as changed, the wall draws them.
import {Wall} from "./wall.js";
import {Link} from "./link.js";
import {applyPreferences} from "./preferences.js";
import {answersPart} from "./answers_part.js";
import {alarmPart} from "./alarm_part.js";
import {regrowthPart} from "./regrowth_part.js";
import {zonesPart} from "./zones_part.js";
import {nowPart} from "./now_part.js";
import {sensorsPart} from "./sensors_part.js";
import {tracesPart} from "./traces_part.js";
import {topPart} from "./top_part.js";
import {keyboard} from "./keys.js";

const TICK_MS = 250; // ages grow and silence is noticed even when nothing comes

const wall = new Wall();
/** @param {string} id of a part */
function body(id) {
  return /** @type {HTMLElement} */ (document.querySelector(`#${id} .body`));
}

wall.add(topPart(wall));
wall.add(answersPart(wall, /** @type {HTMLElement} */ (document.querySelector('#answers'))));
wall.add(alarmPart(wall, body('alarms')));
wall.add(regrowthPart(wall, body('regrowth')));
wall.add(zonesPart(wall, body('zones')));
wall.add(nowPart(wall, body('now')));
wall.add(sensorsPart(wall, body('sensors')));
const traces = tracesPart(wall, body('traces'));
wall.add(traces);
keyboard(wall, traces);

const scheme = location.protocol === 'https:' ? 'wss' : 'ws';
const link = new Link(
  `${scheme}://${location.host}/wall/stream${location.search}`,
  (message) => {
    wall.heard = performance.now();
    wall.outing.apply(message);
    wall.touch(message.kind);
  },
  (state) => {
    wall.pageLink = state;
    wall.touch('link');
  },
);
wall.acknowledge = (/** @type {number} */ id) => link.send({do: 'acknowledge', id});

setInterval(() => wall.touch('tick'), TICK_MS);
document.addEventListener('visibilitychange', () => wall.schedule());
new ResizeObserver(() => wall.touch('size')).observe(document.body);
matchMedia('(prefers-color-scheme: dark)').addEventListener('change', () => {
  applyPreferences(wall.preferences);
  wall.touch('preferences');
});
