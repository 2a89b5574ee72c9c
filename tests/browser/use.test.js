// SPDX-License-Identifier: MIT
// Keyboard, units, colours, sizes of screen.
import {test} from 'node:test';
import assert from 'node:assert/strict';
import {open, T} from './support/made_page.js';
import {picture, read, stands} from './support/browser.js';
import {soFar} from './support/invented_outing.js';
import {clock} from '../../estimator/wall/page/units.js';

test('keyboard alone: parts, closings, traces, help, options', async () => {
  const page = await open(soFar(T));
  await stands(page, '#regrowth', 'closing 18');
  for (const [key, id] of [['1', 'regrowth'], ['2', 'zones'], ['3', 'now'], ['4', 'alarms'], ['5', 'sensors'], ['6', 'traces']]) {
    await page.keyboard.press(key);
    assert.equal(await page.evaluate(() => document.activeElement?.id), id);
    const outline = await page.evaluate(() => getComputedStyle(/** @type {Element} */ (document.activeElement)).outlineStyle);
    assert.equal(outline, 'solid', `${id}: the focus is seen`);
  }
  // In Traces the arrows move through time.
  await page.keyboard.press('ArrowLeft');
  await stands(page, '.trace-window', `${clock(T - 0.1 - 75)} to ${clock(T - 0.1 - 15)}`);
  await page.keyboard.press('+');
  await stands(page, '.trace-window', `${clock(T - 0.1 - 60)} to ${clock(T - 0.1 - 30)}`);
  await page.keyboard.press(',');
  await stands(page, '.trace-window', 'cursor');
  await page.keyboard.press('Home');
  await stands(page, '.trace-window', clock(T - 0.1));
  assert.match(await read(page, '#regrowth'), /closing 18/);
  await page.keyboard.press('1');
  await page.keyboard.press('ArrowLeft');
  await stands(page, '#regrowth', 'closing 17');
  await page.keyboard.press('l');
  await stands(page, '#regrowth', 'closing 18');
  await page.keyboard.press('?');
  await stands(page, '#help', 'acknowledge the alarm on top');
  await page.keyboard.press('Escape');
  assert.equal(await page.locator('#help').isVisible(), false);
  await page.keyboard.press('o');
  await page.locator('#settings').waitFor({state: 'visible'});
  await page.getByLabel('Single keys act').uncheck();
  await page.keyboard.press('Escape');
  await page.keyboard.press('6');
  assert.notEqual(await page.evaluate(() => document.activeElement?.id), 'traces', 'single keys are off');
  // Every control is reached by Tab.
  const reached = new Set();
  await page.evaluate(() => /** @type {HTMLElement} */ (document.activeElement)?.blur());
  for (let i = 0; i < 40; i += 1) {
    await page.keyboard.press('Tab');
    reached.add(await page.evaluate(() => document.activeElement?.textContent || document.activeElement?.className));
  }
  for (const name of ['Options', 'newest', '‹', 'Seen', 'last minute', 'whole outing', 'trace-slider']) assert.ok(reached.has(name), `${name} of ${[...reached].join(' | ')}`);
});

test('units, theme and large figures are switched by key and remembered', async () => {
  const page = await open(soFar(T));
  await stands(page, '#answers', '58 ± 30 N missing');
  await page.keyboard.press('u');
  await page.keyboard.press('u');
  await stands(page, '#answers', '13 ± 7 lbf missing');
  await stands(page, '#regrowth', '206 mph');
  await stands(page, '#alarms', '383 ± 39 lbf missing');
  await page.keyboard.press('d');
  await page.keyboard.press('d');
  assert.equal(await page.evaluate(() => document.documentElement.dataset.theme), 'dark');
  await page.keyboard.press('f');
  await page.reload();
  await stands(page, '#answers', 'lbf missing');
  assert.equal(await page.evaluate(() => document.documentElement.dataset.theme), 'dark');
  assert.ok(await page.evaluate(() => document.documentElement.classList.contains('large')));
  await page.keyboard.press('o');
  await page.locator('#settings').getByLabel('Force').selectOption('kN');
  await page.keyboard.press('Escape');
  await stands(page, '#answers', 'kN missing');
});

test('light and dark follow the machine until the viewer says otherwise', async () => {
  const page = await open(soFar(T), {colorScheme: 'dark'});
  await stands(page, '#answers', 'closing 18');
  const ground = () => page.evaluate(() => getComputedStyle(document.body).backgroundColor);
  assert.equal(await ground(), 'rgb(9, 13, 16)');
  await picture(page, 'dark');
  await page.emulateMedia({colorScheme: 'light'});
  await page.waitForFunction(() => document.documentElement.dataset.theme === 'light');
  assert.equal(await ground(), 'rgb(236, 238, 233)');
  await picture(page, 'light');
});

for (const [name, width, height] of /** @type {[string, number, number][]} */ ([['small-screen', 1366, 768], ['wall-screen', 1920, 1080], ['phone', 390, 844]])) {
  test(`fits ${width} × ${height}`, async () => {
    const page = await open(soFar(T, {fault: true}), {viewport: {width, height}});
    await stands(page, '#regrowth', 'closing 18');
    await page.waitForTimeout(300);
    await picture(page, name);
    const sideways = await page.evaluate(() => document.documentElement.scrollWidth - document.documentElement.clientWidth);
    assert.equal(sideways, 0, 'no scrolling to the side');
    if (name === 'phone') return;
    for (const id of ['answers', 'regrowth', 'zones', 'now', 'alarms']) {
      const box = await page.locator(`#${id}`).boundingBox();
      const foot = await page.locator('footer').boundingBox();
      assert.ok(box && foot && box.y >= 0 && box.y + box.height <= foot.y + 1, `${id} within the first view`);
    }
    // No words of the regrowth's picture are cut off.
    const cut = await page.evaluate(() => {
      const frame = /** @type {Element} */ (document.querySelector('#regrowth .canvas')).getBoundingClientRect();
      return [...document.querySelectorAll('.regrowth-picture text')].filter((t) => t.getBoundingClientRect().right > frame.right + 1 || t.getBoundingClientRect().left < frame.left - 1).map((t) => t.textContent);
    });
    assert.deepEqual(cut, []);
  });
}
