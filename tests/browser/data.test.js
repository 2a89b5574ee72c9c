// SPDX-License-Identifier: MIT
// Sensors and Traces; joining late, a lost link, a node that starts anew.
import {test} from 'node:test';
import assert from 'node:assert/strict';
import {stage, open, closingsCount, T} from './support/made_page.js';
import {read, stands} from './support/browser.js';
import {soFar, now, health, columns, rowAt} from './support/invented_outing.js';
import {clock} from '../../estimator/wall/page/units.js';

test('sensors: trust, gate, rate, gaps, last value, since when and by what sign', async () => {
  const page = await open(soFar(T, {fault: true}));
  await stands(page, '#sensors', 'load_rr');
  await stands(page, '#answers', /load_rr\s*stands still, since 5:41\.2/);
  const rows = await page.locator('#sensors tbody tr').allInnerTexts();
  assert.equal(rows.length, 11);
  assert.match(rows[0].replace(/\s+/g, ' '), /^load_rr distrusted, stands still, since 5:41\.2 5190 N 400 0 412$/);
  assert.match(rows[10], /pitot_pressure\s+not in this log/);
  const rl = rows.find((r) => r.startsWith('load_rl'));
  assert.match(String(rl).replace(/\s+/g, ' '), /^load_rl good 5230 N 400 2 3$/);
  assert.equal(await page.locator('#sensors .gate-refused').count(), 1);
  // The mark's place is the innovation over its gate.
  const sent = health(T, {fault: true}).channels[1];
  const x = await page.evaluate(() => Number(/translate\((\S+) /.exec([...document.querySelectorAll('#sensors tbody tr')].find((r) => r.textContent?.startsWith('load_fl'))?.querySelector('.gate-used')?.getAttribute('transform') ?? '')?.[1]));
  assert.ok(Math.abs(x / 40 - Math.sign(Number(sent.innovation)) * Math.sqrt(Number(sent.test_ratio))) < 0.01);
});

test('traces: last minute, the cursor of one is the cursor of all, drag to zoom, back by double click', async () => {
  const page = await open(soFar(T));
  stage.server.say(now(T + 0.5, {samples: columns(T, T + 0.5, 0.02)}));
  await stands(page, '.trace-window', '5:52.5');
  const speed = page.locator('.trace-plot').first().locator('.u-over');
  await speed.scrollIntoViewIfNeeded();
  const box = /** @type {{x: number, y: number, width: number, height: number}} */ (await speed.boundingBox());
  await page.mouse.move(box.x + box.width / 2, box.y + box.height / 2);
  await stands(page, '.trace-window', /cursor 5:2\d\.\d\d/);
  const at = /cursor (\d+):(\d+\.\d+)/.exec(await read(page, '.trace-window'));
  const t = Number(at?.[1]) * 60 + Number(at?.[2]);
  const names = await page.locator('.trace-title').allInnerTexts();
  assert.ok(names[0].includes(rowAt(t)[1].toFixed(1)), `${names[0]} at ${t}: ${rowAt(t)[1]}`);
  assert.ok(names[3].replace(/\s+/g, ' ').includes(`downforce rear ${rowAt(t)[7].toFixed(2)}`), names[3]);
  assert.ok(names[3].includes('bands 95 %'));
  await page.mouse.down();
  await page.mouse.move(box.x + box.width * 0.75, box.y + 20, {steps: 4});
  await page.mouse.up();
  await page.waitForFunction(() => {
    const m = /(\d+):([\d.]+) to (\d+):([\d.]+)/.exec(document.querySelector('.trace-window')?.textContent ?? '');
    return m && Number(m[3]) * 60 + Number(m[4]) - Number(m[1]) * 60 - Number(m[2]) < 20;
  });
  await page.mouse.dblclick(box.x + 50, box.y + 20);
  await page.waitForFunction(() => /4:5\d\.\d to 5:5\d/.test(document.querySelector('.trace-window')?.textContent ?? ''));
  await page.getByRole('button', {name: 'whole outing'}).click();
  await stands(page, '.trace-window', '0:00.0 to 5:5');
});

test('late join and reload show the outing so far', async () => {
  const page = await open(soFar(T));
  await stands(page, '#clock', clock(T - 0.1));
  await page.locator('.zone-closing').nth(17).waitFor({state: 'attached'});
  stage.server.greeting = soFar(T + 20);
  await page.reload();
  await stands(page, '#clock', clock(T + 19.9));
  await closingsCount(page, 18);
  await page.getByRole('button', {name: 'whole outing'}).click();
  await stands(page, '.trace-window', `0:00.0 to ${clock(T + 19.9)}`);
});

test('link lost is said at once; it comes back by itself with all of the outing, and a restart begins anew', async () => {
  const page = await open(soFar(T));
  await stands(page, '#link', 'link up');
  stage.server.open = false;
  const cut = Date.now();
  stage.server.cut();
  await page.locator('#lost').waitFor({state: 'visible'});
  assert.ok(Date.now() - cut < 3000);
  await stands(page, '#link', 'link lost');
  await stands(page, '#now', /unknown\s*link lost/);
  await stands(page, '#answers', /Unknown\s*link lost/);
  stage.server.greeting = soFar(T + 5);
  stage.server.open = true;
  await page.locator('#lost').waitFor({state: 'hidden'});
  await stands(page, '#clock', clock(T + 4.9));
  await closingsCount(page, 18);
  stage.server.say(...soFar(20));
  await stands(page, '#clock', clock(19.9));
  await closingsCount(page, 1);
});
