// SPDX-License-Identifier: MIT
// The page against the real programs: carnode plays a bundled outing, holdfast live serves the page. What the page
// shows is held against closures.csv and estimates.csv, which other code wrote from the same run.
import {test, before, after} from 'node:test';
import assert from 'node:assert/strict';
import {join} from 'node:path';
import {launch, openPage, picture, read, stands} from './support/browser.js';
import {bundled, csv, folder, freePort, run, until} from './support/programs.js';

const PACE = Number(process.env.HOLDFAST_PACE ?? 10); // 230 s of outing

/** @type {import('playwright-core').Browser} */
let browser;
const out = folder();

before(async () => {
  browser = await launch();
});
after(async () => {
  await browser.close();
  out.remove();
});

/** "1.23 ± 0.45" as numbers, whatever their minus. @param {string|undefined} text */
function pair(text) {
  const m = /([−\d.\u2009]+) ± ([\d.\u2009]+)/.exec(text ?? '');
  assert.ok(m, `a value with its uncertainty in "${text}"`);
  return m.slice(1).map((n) => Number(n.replace('−', '-').replaceAll('\u2009', '')));
}

/** Equal within what is lost by rounding to the decimals shown. @param {number} shown @param {string} cell @param {string} what */
function near(shown, cell, what) {
  const value = Number(cell);
  assert.ok(Math.abs(shown - value) <= Math.max(0.006 * Math.abs(value), 0.6), `${what}: ${shown} on the page, ${cell} in the file`);
}

test('a live outing from its first second to its end', async () => {
  const {log, car} = bundled('demo');
  const [linkPort, pagePort] = [await freePort(), await freePort()];
  const endpoint = `tcp://127.0.0.1:${linkPort}`;
  const url = `http://127.0.0.1:${pagePort}/`;
  const live = run('holdfast', ['live', '--from', endpoint, '--car', car, '--out', out.path, '--page', `127.0.0.1:${pagePort}`]);
  try {
    await until(async () => (await fetch(url).catch(() => null))?.ok === true, 20000, 'the page is served');
    const {page, context, errors} = await openPage(browser, url);
    const node = run('carnode', ['play', log, '--car', car, '--bind', endpoint, '--pace', String(PACE)]);
    const sourceTime = async (/** @type {import('playwright-core').Page} */ p) => {
      const m = /(\d+):([\d.]+)/.exec(await read(p, '#clock'));
      return m ? Number(m[1]) * 60 + Number(m[2]) : -1;
    };

    await until(async () => (await sourceTime(page)) > 20, 60000, 'data come');
    await stands(page, '#link', 'link up');
    await stands(page, '#car', 'Plover 11');
    await until(async () => (await page.locator('.zone-closing').count()) >= 1, 60000, 'the first closing');
    await stands(page, '#answers', 'closing 1, lap 1, zone 3');
    await stands(page, '#now', /± .* N/);

    // The machine loses its network and finds it again.
    await context.setOffline(true);
    await stands(page, '#link', 'link lost');
    await context.setOffline(false);
    await stands(page, '#link', 'link up');
    await until(async () => (await page.locator('.zone-closing').count()) >= 1, 20000, 'what was there is there again');

    // Reload in mid-outing.
    await page.reload();
    await stands(page, '#link', 'link up');
    await until(async () => (await page.locator('.zone-closing').count()) >= 1, 20000, 'closings after a reload');

    // Alarm, seen by one viewer, gone for another who joined late.
    await until(async () => (await page.locator('.alarm').count()) >= 1, 90000, 'an alarm');
    const late = await openPage(browser, url, {viewport: {width: 390, height: 844}});
    await until(async () => (await late.page.locator('.zone-closing').count()) === (await page.locator('.zone-closing').count()), 20000, 'the late viewer has all closings');
    const text = await page.locator('.alarm-text').first().innerText();
    assert.equal(await late.page.locator('.alarm-text').first().innerText(), text);
    await page.keyboard.press('a');
    const answered = (/** @type {import('playwright-core').Page} */ p) => p.evaluate((t) => ![...document.querySelectorAll('.alarm')].some((a) => a.querySelector('.acknowledge') && a.textContent?.includes(t)), text);
    await until(() => answered(page), 20000, 'acknowledged here');
    await until(() => answered(late.page), 20000, 'acknowledged there');

    assert.equal(await node.ended, 0, node.told.text);
    await stands(page, '#link', 'ended, complete');
    await stands(page, '#now', 'the outing has ended');
    assert.equal(await live.ended, 0, live.told.text);
    await picture(page, 'real-end');
    await picture(late.page, 'real-end-phone', true);

    await closingsAsInFile(page);
    await tracesAsInFile(page);
    assert.deepEqual([...errors, ...late.errors], []);
  } finally {
    live.child.kill();
  }
});

/** Each closing's answers and picture against its row. @param {import('playwright-core').Page} page */
async function closingsAsInFile(page) {
  const rows = csv(join(out.path, 'closures.csv'));
  assert.ok(rows.length >= 8);
  assert.equal(await page.locator('.zone-closing').count(), rows.filter((r) => r.zone !== '0').length);
  assert.equal(await page.locator('.zone-closing .mark-frame').count(), rows.filter((r) => r.slow === '1').length);
  await page.keyboard.press('1');
  for (const row of [...rows].reverse()) {
    await stands(page, '#regrowth', `closing ${row.closure}, lap ${row.lap}, zone ${row.zone}`);
    await stands(page, '#answers', `closing ${row.closure}, lap`);
    const answers = await read(page, '#answers');
    assert.ok(answers.includes({full: 'Back in time', short: 'Short at the brakes', unclear: 'Unclear'}[row.verdict] ?? 'no verdict'), answers);
    assert.equal(/Slow: |Slow |Settles/.test(answers), row.slow === '1', answers);
    const [missing, missingSd] = pair(answers);
    near(missing, row.shortfall, `closing ${row.closure}, missing`);
    near(missingSd, row.shortfall_sd, `closing ${row.closure}, missing sd`);
    const margin = /([\d.]+) ± ([\d.]+) ms (to spare|too late)/.exec(answers);
    assert.ok(margin, answers);
    near(Number(margin[1]) * (margin[3] === 'to spare' ? 1 : -1), String(Number(row.margin) * 1000), `closing ${row.closure}, margin`);
    near(Number(margin[2]), String(Number(row.margin_sd) * 1000), `closing ${row.closure}, margin sd`);
    const t95 = /back in (\d+) ms \((\d+)–(\d+)\)/.exec(answers);
    assert.ok(t95, answers);
    near(Number(t95[1]), String(Number(row.t95) * 1000), `closing ${row.closure}, t95`);
    near(Number(t95[2]), String(Number(row.t95_low) * 1000), `closing ${row.closure}, t95 low`);
    near(Number(t95[3]), String(Number(row.t95_high) * 1000), `closing ${row.closure}, t95 high`);
    const brakes = /brakes on (\d+) ms after shut/.exec(await read(page, '#regrowth'));
    near(Number(brakes?.[1]), String((Number(row.time_brake) - Number(row.time_closed)) * 1000), `closing ${row.closure}, brakes`);
    // The curve itself passes 95 % where the file says so.
    const crossing = await page.evaluate(crossing95);
    assert.ok(Math.abs(crossing - Number(row.t95) * 1000) < 4, `closing ${row.closure}: the curve passes 95 % at ${crossing} ms, ${row.t95} s in the file`);
    await page.keyboard.press('ArrowLeft');
  }
}

/** Runs in the page: milliseconds after shut at which the drawn curve passes 95 %, read off the picture's own axes. */
function crossing95() {
  const ys = (/** @type {string} */ s) => Number(document.querySelector(`.regrowth-picture ${s}`)?.getAttribute('y1'));
  const none = Number(document.querySelector('.regrowth-picture .grid')?.getAttribute('y1'));
  const level = none + 0.95 * (ys('.whole-line') - none);
  const path = [...document.querySelectorAll('.regrowth-picture .own-line')].map((n) => n.getAttribute('d')).sort((a, b) => (b?.length ?? 0) - (a?.length ?? 0))[0] ?? '';
  const points = [...path.matchAll(/([\d.]+) ([\d.]+)/g)].map((m) => [Number(m[1]), Number(m[2])]);
  const i = points.findIndex((p) => p[1] <= level);
  const [a, b] = [points[i - 1], points[i]];
  const x = a[0] + ((b[0] - a[0]) * (level - a[1])) / (b[1] - a[1]);
  const ticks = [...document.querySelectorAll('.regrowth-picture .tick')].filter((t) => t.getAttribute('text-anchor') === 'middle' && /^\d+$/.test(t.textContent ?? '')).map((t) => [Number(t.textContent), Number(t.getAttribute('x')), Number(t.getAttribute('y'))]);
  const lowest = Math.max(...ticks.map((t) => t[2]));
  const time = ticks.filter((t) => t[2] === lowest);
  const [first, last] = [time[0], time[time.length - 1]];
  return first[0] + ((x - first[1]) * (last[0] - first[0])) / (last[1] - first[1]);
}

/** Values under the cursor against the file's rows of the same instants. @param {import('playwright-core').Page} page */
async function tracesAsInFile(page) {
  const rows = csv(join(out.path, 'estimates.csv'));
  const end = Number(rows[rows.length - 1].t);
  await page.keyboard.press('6');
  await page.keyboard.press('Home');
  let looked = 0;
  for (let back = 0; back < 3; back += 1) {
    await page.keyboard.press('ArrowLeft');
    for (let step = 0; step < 4; step += 1) {
      await page.keyboard.press(',');
      await page.waitForTimeout(150);
      const at = /cursor (\d+):([\d.]+)/.exec(await read(page, '.trace-window'));
      assert.ok(at);
      const t = Number(at[1]) * 60 + Number(at[2]);
      const row = rows.reduce((a, b) => (Math.abs(Number(b.t) - t) < Math.abs(Number(a.t) - t) ? b : a));
      assert.ok(Math.abs(Number(row.t) - t) < 0.011, `a row at ${t}`);
      const titles = (await page.locator('.trace-title').allInnerTexts()).join(' ').replace(/\s+/g, ' ');
      const shown = (/** @type {string} */ name) => Number(new RegExp(`${name} ([\\d.]+)`).exec(titles)?.[1]);
      assert.ok(Math.abs(shown('over ground') - Number(row.speed)) < 0.06, `speed at ${t}: ${titles}; ${row.speed}`);
      assert.ok(Math.abs(shown('downforce front') - Number(row.cla_front)) < 0.006, `front at ${t}: ${row.cla_front}; ${titles}`);
      assert.ok(Math.abs(shown('downforce rear') - Number(row.cla_rear)) < 0.006, `rear at ${t}: ${row.cla_rear}; ${titles}`);
      assert.ok(Math.abs(shown('drag') - Number(row.cda)) < 0.006, `drag at ${t}: ${row.cda}; ${titles}`);
      assert.ok(Math.abs(shown('flow attached') - 100 * Number(row.attached)) < 0.6, `attached at ${t}`);
      looked += 1;
    }
  }
  assert.ok(looked === 12 && end > 200);
}
