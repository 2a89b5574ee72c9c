// SPDX-License-Identifier: MIT
// What is looked at most: answers, Regrowth, Zones, Now; each with the numbers that were sent.
import {test} from 'node:test';
import assert from 'node:assert/strict';
import {stage, open, T} from './support/made_page.js';
import {picture, read, stands} from './support/browser.js';
import {soFar, now, closureOf, regrowthOf, columns, rowAt, end, CAUTIONS} from './support/invented_outing.js';
import {valueAt} from '../../estimator/wall/page/curve.js';

test('an empty outing says so, and nothing reads as fine', async () => {
  const page = await open(soFar(0));
  await stands(page, '#answers', 'No closing yet');
  assert.match(await read(page, '#regrowth'), /The first closing of the flap will grow here/);
  assert.match(await read(page, '#zones'), /Each braking zone gets its picture/);
  await page.locator('.alarms-quiet').waitFor({state: 'visible'});
  for (const caution of CAUTIONS) assert.ok((await read(page, '#cautions')).includes(caution));
});

test('three answers of the newest closing', async () => {
  const page = await open(soFar(T));
  await stands(page, '#answers', 'closing 18, lap 6, zone 4');
  const answers = await read(page, '#answers');
  assert.match(answers, /Back in time 58 ± 30 N missing; 164 ± 18 ms to spare/);
  assert.match(answers, /Usual pace/);
  assert.match(answers, /All trusted 10 channels/);
});

test('regrowth: curve, usual band, chords, flap, brakes and what was missing', async () => {
  const page = await open(soFar(T));
  await stands(page, '#regrowth', 'closing 18');
  await page.locator('[data-closing="11"] .hit').click();
  await stands(page, '#regrowth', 'closing 11, lap 4, zone 2');
  const words = await read(page, '#regrowth');
  assert.match(words, /usual here \(3 earlier\)/);
  assert.match(words, /1703 ± 175 N missing/);
  assert.match(words, /brakes on 230 ms after shut/);
  assert.match(words, /chords of travel/);
  // The curve's height at the brakes' line, read back from the picture, is the share that was sent.
  const at = await page.evaluate(() => {
    const number = (/** @type {string} */ selector, /** @type {string} */ name) => Number(document.querySelector(selector)?.getAttribute(name));
    const brake = number('.regrowth-picture .brake-line', 'x1');
    const bar = number('.regrowth-picture .missing-bar', 'y1');
    const whole = number('.regrowth-picture .whole-line', 'y1');
    const zero = number('.regrowth-picture .zero-line', 'x1');
    const none = Number(document.querySelectorAll('.regrowth-picture .grid')[0].getAttribute('y1'));
    return {brake, zero, share: (none - bar) / (none - whole)};
  });
  const r = regrowthOf(11);
  const sent = valueAt(r.t, r.share, 0.23);
  assert.ok(Math.abs(at.share - sent) < 0.005, `${at.share} against ${sent}`);
  assert.ok(at.brake > at.zero);
  assert.equal(await page.locator('.regrowth-picture .flap-line').count(), 1);
  assert.equal(await page.locator('.regrowth-picture .usual-band').count(), 1);
  await picture(page, 'regrowth-slow');
});

test('regrowth: usual is not known before three closings', async () => {
  const page = await open(soFar(70));
  await stands(page, '#regrowth', 'usual not known yet (2 of 3 closings)');
  assert.equal(await page.locator('.regrowth-picture .usual-band').count(), 0);
  await stands(page, '#answers', 'Not known yet');
});

test('a closing grows before it is judged', async () => {
  const page = await open(soFar(71.5));
  stage.server.say({kind: 'regrowth', ...regrowthOf(4, 0.03)});
  await stands(page, '#answers', /Is the flow back\? closing 4\s*6\d % back/);
  assert.ok(await page.locator('.own-line.own-expected').count());
  stage.server.say({kind: 'regrowth', ...regrowthOf(4)}, {kind: 'closure', ...closureOf(4)});
  await stands(page, '#answers', 'closing 4, lap 2, zone 1');
  await stands(page, '#answers', 'Back in time');
});

test('a closing that was chosen stays while a new one comes, until newest is asked for', async () => {
  const page = await open(soFar(71.5));
  await page.keyboard.press('ArrowLeft');
  await stands(page, '#answers', 'earlier: closing 2');
  stage.server.say({kind: 'regrowth', ...regrowthOf(4)}, {kind: 'closure', ...closureOf(4)});
  await page.locator('.zones [data-closing="4"]').waitFor({state: 'attached'});
  assert.match(await read(page, '#regrowth'), /closing 2, lap 1/);
  await page.getByRole('button', {name: 'newest'}).click();
  await stands(page, '#regrowth', 'closing 4, lap 2');
});

test('zones: a picture for each, every closing in it, slow ones framed, shapes for verdicts', async () => {
  const page = await open(soFar(T));
  await stands(page, '#zones', 'Zone 4');
  assert.equal(await page.locator('.zone').count(), 3);
  assert.match(await read(page, '#zones'), /Zone 1 6×, 1 slow.*Zone 2 6×, 2 short, 2 slow.*Zone 4 6×/);
  assert.equal(await page.locator('.zone-closing').count(), 18);
  assert.equal(await page.locator('.zone-closing .mark-frame').count(), 3);
  assert.equal(await page.locator('.zone-closing .mark-short').count(), 2);
  assert.equal(await page.locator('.zone-closing .mark-unclear').count(), 1);
  // Heights are margins: closing 11 at -0.37 s against the axis' own ticks.
  const margin = await page.evaluate(() => {
    const group = /** @type {Element} */ (document.querySelector('.zone-closing[data-closing="11"]'));
    const picture = /** @type {Element} */ (group.closest('svg'));
    const y = Number(/translate\(\S+ (\S+)\)/.exec(group.querySelector('.mark')?.getAttribute('transform') ?? '')?.[1]);
    const zero = Number(picture.querySelector('.brake-line')?.getAttribute('y1'));
    const tick = [...picture.querySelectorAll('.tick')].find((node) => node.textContent === '−0.2');
    const below = Number([...picture.querySelectorAll('.grid')].map((g) => Number(g.getAttribute('y1'))).find((g) => Math.abs(g + 4 - Number(tick?.getAttribute('y'))) < 3));
    return (-0.2 * (y - zero)) / (below - zero);
  });
  assert.ok(Math.abs(margin + 0.37) < 0.01, String(margin));
});

test('now: values, intervals and age; unknown, and why, when it is not known', async () => {
  const page = await open(soFar(T));
  const row = rowAt(T + 0.08);
  stage.server.say(now(T + 0.1, {samples: columns(T, T + 0.1, 0.02)}));
  // The program speaks at least twice a second.
  let state = {};
  const beat = setInterval(() => stage.server.say(now(T + 0.1, state)), 100).unref();
  await stands(page, '#now', Math.round(row[12]).toString());
  const words = await read(page, '#now');
  assert.ok(words.includes(`${Math.round(row[14])} ± ${Math.round(row[15])} N`), words);
  assert.ok(words.includes(`${row[9].toFixed(3)} ± ${row[10].toFixed(3)} m²`), words);
  const share = (100 * row[12]) / (row[12] + row[14]);
  assert.ok(words.includes(share.toFixed(1)), words);
  assert.match(words, /\d s old/);
  assert.match(words, /wind is in it/);

  state = {flags: ['not_converged']};
  await stands(page, '#now', /unknown\s*too little seen yet/);
  state = {flags: ['stale']};
  await stands(page, '#now', /unknown\s*needed data stopped coming/);
  state = {link: {...now(T).link, state: 'silent'}, age_s: 2};
  await stands(page, '#now', /unknown\s*nothing comes from the car/);
  await stands(page, '#link', /car silent/);
  await stands(page, '#answers', 'No data');
  // The program itself falls silent: nothing more comes.
  state = {};
  await stands(page, '#now', /s old/);
  clearInterval(beat);
  await stands(page, '#now', /unknown\s*the program is silent/);
  assert.match(await read(page, '#now'), /program is silent \d+ ± \d+ N \d s ago/, 'the last that was known, and its age');
});

test('the end of the outing is told, and is no loss of the link', async () => {
  const page = await open([...soFar(T), end(T)]);
  await stands(page, '#link', 'ended, complete');
  await stands(page, '#now', 'the outing has ended');
  stage.server.open = false;
  stage.server.cut();
  await page.waitForTimeout(400);
  assert.equal(await page.locator('#lost').isVisible(), false);
});
