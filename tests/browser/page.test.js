// SPDX-License-Identifier: MIT
// The page in a real browser, against a stream that the tests make: each part with the numbers that were sent.
import {test, before, after, beforeEach, afterEach} from 'node:test';
import assert from 'node:assert/strict';
import {StreamServer} from './support/stream_server.js';
import {launch, openPage, picture, read, stands} from './support/browser.js';
import {soFar, now, health, closureOf, regrowthOf, columns, rowAt, alarm, end, CAUTIONS} from './support/invented_outing.js';
import {valueAt} from '../../estimator/wall/page/curve.js';
import {clock} from '../../estimator/wall/page/units.js';

const T = 352; // lap 6; 18 closings

/** @type {import('playwright-core').Browser} */
let browser;
/** @type {StreamServer} */
let server;
let url = '';
/** @type {string[]} errors that the browser's console showed in the test */
let errors = [];

before(async () => {
  browser = await launch();
});
after(() => browser.close());
beforeEach(async () => {
  server = new StreamServer();
  url = await server.listen();
  errors = [];
});
afterEach(async () => {
  for (const context of browser.contexts()) await context.close();
  await server.close();
  assert.deepEqual(errors, []);
});

/** @param {object[]} greeting @param {import('playwright-core').BrowserContextOptions} [options] */
async function open(greeting, options) {
  server.greeting = greeting;
  const opened = await openPage(browser, url, options);
  errors = opened.errors;
  await stands(opened.page, '#link', /./);
  return opened.page;
}

/** Keeps saying "now" as the program does, until stopped. @param {number} t @param {object} [change] */
function talk(t, change = {}) {
  let at = t;
  const timer = setInterval(() => {
    server.say(now(at + 0.1, {samples: columns(at, at + 0.1, 0.02), ...change}));
    at += 0.1;
  }, 100);
  return () => clearInterval(timer);
}

/** Waits until Zones shows so many closings. @param {import('playwright-core').Page} page @param {number} count */
async function closingsCount(page, count) {
  await page.waitForFunction((n) => document.querySelectorAll('.zone-closing').length === n, count);
}

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
  await stands(page, '#answers', 'Usual not known yet');
});

test('a closing grows before it is judged', async () => {
  const page = await open(soFar(71.5));
  server.say({kind: 'regrowth', ...regrowthOf(4, 0.03)});
  await stands(page, '#answers', /Is the flow back\? closing 4\s*6\d % back/);
  assert.ok(await page.locator('.own-line.own-expected').count());
  server.say({kind: 'regrowth', ...regrowthOf(4)}, {kind: 'closure', ...closureOf(4)});
  await stands(page, '#answers', 'closing 4, lap 2, zone 1');
  await stands(page, '#answers', 'Back in time');
});

test('a closing that was chosen stays while a new one comes, until newest is asked for', async () => {
  const page = await open(soFar(71.5));
  await page.keyboard.press('ArrowLeft');
  await stands(page, '#answers', 'earlier: closing 2');
  server.say({kind: 'regrowth', ...regrowthOf(4)}, {kind: 'closure', ...closureOf(4)});
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
  server.say(now(T + 0.1, {samples: columns(T, T + 0.1, 0.02)}));
  await stands(page, '#now', Math.round(row[12]).toString());
  const words = await read(page, '#now');
  assert.ok(words.includes(`${Math.round(row[14])} ± ${Math.round(row[15])} N`), words);
  assert.ok(words.includes(`${row[9].toFixed(3)} ± ${row[10].toFixed(3)} m²`), words);
  const share = (100 * row[12]) / (row[12] + row[14]);
  assert.ok(words.includes(share.toFixed(1)), words);
  assert.match(words, /0\.\d s old/);
  assert.match(words, /wind is in it/);

  server.say(now(T + 0.2, {flags: ['not_converged']}));
  await stands(page, '#now', /unknown\s*too little seen yet/);
  server.say(now(T + 0.2, {flags: ['stale']}));
  await stands(page, '#now', /unknown\s*needed data stopped coming/);
  server.say(now(T + 0.2, {link: {...now(T).link, state: 'silent'}, age_s: 2}));
  await stands(page, '#now', /unknown\s*nothing comes from the car/);
  await stands(page, '#link', /car silent/);
  await stands(page, '#answers', 'No data');
  // The program itself falls silent: nothing more comes.
  server.say(now(T + 0.3));
  await stands(page, '#now', /s old/);
  await stands(page, '#now', /unknown\s*the program is silent/);
  assert.match(await read(page, '#now'), /program is silent \d+ ± \d+ N \d s ago/, 'the last that was known, and its age');
});

test('the end of the outing is told, and is no loss of the link', async () => {
  const page = await open([...soFar(T), end(T)]);
  await stands(page, '#link', 'ended, complete');
  await stands(page, '#now', 'the outing has ended');
  server.open = false;
  server.cut();
  await page.waitForTimeout(400);
  assert.equal(await page.locator('#lost').isVisible(), false);
});

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
  // By click: the page asks, the program answers, only then is it gone.
  await page.getByRole('button', {name: /^Seen: closing 11: downforce short/}).click();
  await page.waitForTimeout(100);
  assert.deepEqual(server.heard, [{do: 'acknowledge', id: 1}]);
  assert.equal((await words()).length, 3);
  server.say({kind: 'alarm_acknowledged', id: 1, by_s: 1});
  await page.locator('.alarm-high').waitFor({state: 'detached'});
  // By key: the one on top.
  await page.keyboard.press('a');
  await page.waitForTimeout(100);
  assert.deepEqual(server.heard[1], {do: 'acknowledge', id: 2});
  server.say({kind: 'alarm_acknowledged', id: 2, by_s: 2}, {kind: 'alarm_acknowledged', id: 3, by_s: 2});
  // What is still so stays, answered; it leaves when it is over.
  await stands(page, '.alarm', 'acknowledged, still so');
  assert.equal((await words()).length, 1);
  server.say({kind: 'alarm', ...alarm(3, {t: 341.4, severity: 'low', text: 'sensor distrusted: load_rr', acknowledged: true})});
  await page.locator('.alarms-quiet').waitFor({state: 'visible'});
  assert.match(await read(page, '#alarms'), /Nothing to answer.*3 acknowledged and over/);
});

test('alarms: a new one is added without disturbing the others, and the focus stays', async () => {
  const page = await open(soFar(T, {fault: true}));
  await stands(page, '#alarms', 'load_rr');
  await page.evaluate(() => document.querySelectorAll('.alarm')[2].setAttribute('data-kept', 'yes'));
  await page.getByRole('button', {name: /^Seen: sensor/}).focus();
  server.say({kind: 'alarm', ...alarm(9, {t: 351, severity: 'high', text: 'closing 19: downforce short', active: true})});
  await stands(page, '#alarms', 'closing 19');
  assert.equal(await page.locator('[data-kept]').count(), 1);
  assert.equal(await page.evaluate(() => document.activeElement?.getAttribute('aria-label')), 'Seen: sensor distrusted, left out of the estimate: load_rr');
  // Back twice: the same alarm, said anew.
  server.say({kind: 'alarm', ...alarm(9, {t: 351, severity: 'high', text: 'closing 19: downforce short', times: 3})});
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
  server.say({kind: 'alarm', ...alarm(20, {t: 351, severity: 'low', text: 'first new'})});
  await stands(page, '#alarms', 'first new');
  assert.equal(await tones(), 0);
  await page.keyboard.press('s');
  server.say({kind: 'alarm', ...alarm(21, {t: 351, severity: 'low', text: 'second new'})});
  await stands(page, '#alarms', 'second new');
  assert.equal(await tones(), 1);
  server.say({kind: 'alarm', ...alarm(21, {t: 351, severity: 'low', text: 'second new', times: 2})});
  await stands(page, '#alarms', 'came 2 times');
  assert.equal(await tones(), 1, 'the same alarm again is no new one');
  server.say({kind: 'alarm', ...alarm(22, {t: 351, severity: 'high', text: 'third new'})});
  await stands(page, '#alarms', 'third new');
  assert.equal(await tones(), 5);
});

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
  const stop = talk(T);
  await stands(page, '.trace-window', '5:52');
  const speed = page.locator('.trace-plot').first().locator('.u-over');
  await speed.scrollIntoViewIfNeeded();
  const box = /** @type {{x: number, y: number, width: number, height: number}} */ (await speed.boundingBox());
  stop();
  await page.waitForTimeout(300);
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
  server.greeting = soFar(T + 20);
  await page.reload();
  await stands(page, '#clock', clock(T + 19.9));
  await closingsCount(page, 18);
  await page.getByRole('button', {name: 'whole outing'}).click();
  await stands(page, '.trace-window', `0:00.0 to ${clock(T + 19.9)}`);
});

test('link lost is said at once; it comes back by itself with all of the outing, and a restart begins anew', async () => {
  const page = await open(soFar(T));
  await stands(page, '#link', 'link up');
  server.open = false;
  const cut = Date.now();
  server.cut();
  await page.locator('#lost').waitFor({state: 'visible'});
  assert.ok(Date.now() - cut < 1000);
  await stands(page, '#link', 'link lost');
  await stands(page, '#now', /unknown\s*link lost/);
  await stands(page, '#answers', /Unknown\s*link lost/);
  server.greeting = soFar(T + 5);
  server.open = true;
  await page.locator('#lost').waitFor({state: 'hidden'});
  await stands(page, '#clock', clock(T + 4.9));
  await closingsCount(page, 18);
  server.say(...soFar(20));
  await stands(page, '#clock', clock(19.9));
  await closingsCount(page, 1);
});

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
