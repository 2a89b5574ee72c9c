// SPDX-License-Identifier: MIT
// The alarm rail: latched, ordered, acknowledged by a person; and its sound.
import {test} from 'node:test';
import assert from 'node:assert/strict';
import {stage, open, heard, T} from './support/made_page.js';
import {read, stands} from './support/browser.js';
import {soFar, alarm} from './support/invented_outing.js';

test('alarms: latched, the first of a burst on top, acknowledged by click and by key', async () => {
  const page = await open(soFar(T, {fault: true}));
  await stands(page, '#alarms', 'first of 2');
  const words = () => page.locator('.alarm').allInnerTexts();
  const first = await words();
  assert.equal(first.length, 3);
  assert.match(first[0], /ACT[\s\S]*3:31\.3[\s\S]*1703\s±\s175 N missing[\s\S]*over by itself/);
  assert.match(first[1], /LOOK/);
  assert.match(first[2], /NOTE[\s\S]*load_rr[\s\S]*still so/);
  assert.equal(await page.title(), '(3) Holdfast');
  assert.match(await read(page, '#alarms'), /^Alarms: 3 to answer/);
  // By click: the page asks, the program answers, only then is it gone.
  await page.getByRole('button', {name: /^Seen: closing 11: downforce short/}).click();
  assert.deepEqual(await heard(1), [{do: 'acknowledge', id: 1}]);
  assert.equal((await words()).length, 3);
  stage.server.say({kind: 'alarm_acknowledged', id: 1, by_s: 1});
  await page.locator('.alarm-high').waitFor({state: 'detached'});
  // By key: the one on top.
  await page.keyboard.press('a');
  assert.deepEqual((await heard(2))[1], {do: 'acknowledge', id: 2});
  stage.server.say({kind: 'alarm_acknowledged', id: 2, by_s: 2}, {kind: 'alarm_acknowledged', id: 3, by_s: 2});
  // What is still so stays, answered; it leaves when it is over.
  await stands(page, '.alarm', 'acknowledged, still so');
  assert.equal((await words()).length, 1);
  stage.server.say({kind: 'alarm', ...alarm(3, {t: 341.4, severity: 'low', text: 'sensor distrusted: load_rr', acknowledged: true})});
  await page.locator('.alarms-quiet').waitFor({state: 'visible'});
  assert.match(await read(page, '#alarms'), /Nothing to answer.*3 acknowledged and over/);
});

test('alarms: a new one is added without disturbing the others, and the focus stays', async () => {
  const page = await open(soFar(T, {fault: true}));
  await stands(page, '#alarms', 'load_rr');
  await page.evaluate(() => document.querySelectorAll('.alarm')[2].setAttribute('data-kept', 'yes'));
  await page.getByRole('button', {name: /^Seen: sensor/}).focus();
  stage.server.say({kind: 'alarm', ...alarm(9, {t: 351, severity: 'high', text: 'closing 19: downforce short', active: true})});
  await stands(page, '#alarms', 'closing 19');
  assert.equal(await page.locator('[data-kept]').count(), 1);
  assert.equal(await page.evaluate(() => document.activeElement?.getAttribute('aria-label')), 'Seen: sensor distrusted, left out of the estimate: load_rr');
  // Back twice: the same alarm, said anew.
  stage.server.say({kind: 'alarm', ...alarm(9, {t: 351, severity: 'high', text: 'closing 19: downforce short', times: 3})});
  await stands(page, '#alarms', 'over by itself, came 3 times');
});

test('sound: silent unless asked for, then once for each new alarm', async () => {
  const page = await open(soFar(T));
  await stands(page, '#alarms', 'first of 2');
  await page.evaluate(() => {
    const heard = /** @type {any} */ (globalThis);
    heard.tones = 0;
    const Real = OscillatorNode;
    heard.OscillatorNode = class extends Real {
      constructor(/** @type {BaseAudioContext} */ context, /** @type {OscillatorOptions} */ options) {
        super(context, options);
        heard.tones += 1;
      }
    };
  });
  const tones = () => page.evaluate(() => /** @type {any} */ (globalThis).tones);
  stage.server.say({kind: 'alarm', ...alarm(20, {t: 351, severity: 'low', text: 'first new'})});
  await stands(page, '#alarms', 'first new');
  assert.equal(await tones(), 0);
  await page.keyboard.press('s');
  stage.server.say({kind: 'alarm', ...alarm(21, {t: 351, severity: 'low', text: 'second new'})});
  await stands(page, '#alarms', 'second new');
  assert.equal(await tones(), 1);
  stage.server.say({kind: 'alarm', ...alarm(21, {t: 351, severity: 'low', text: 'second new', times: 2})});
  await stands(page, '#alarms', 'came 2 times');
  assert.equal(await tones(), 1, 'the same alarm again is no new one');
  stage.server.say({kind: 'alarm', ...alarm(22, {t: 351, severity: 'high', text: 'third new'})});
  await stands(page, '#alarms', 'third new');
  assert.equal(await tones(), 5);
});
