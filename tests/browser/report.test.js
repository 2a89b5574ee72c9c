// SPDX-License-Identifier: MIT
// report.html of a replay, opened as a colleague opens it: from the disk, without the program. Its numbers are held
// against closures.csv and summary.json of the same run.
import {test, before, after} from 'node:test';
import assert from 'node:assert/strict';
import {readFileSync} from 'node:fs';
import {join} from 'node:path';
import {pathToFileURL} from 'node:url';
import {launch, openPage, picture, read} from './support/browser.js';
import {bundled, csv, folder, run} from './support/programs.js';

const AXE = readFileSync(new URL('node_modules/axe-core/axe.min.js', import.meta.url), 'utf8');

/** @type {import('playwright-core').Browser} */
let browser;
const out = folder();

before(async () => {
  browser = await launch();
  const {log, car} = bundled('demo');
  const replay = run('holdfast', ['replay', log, '--car', car, '--out', out.path]);
  assert.equal(await replay.ended, 0, replay.told.text);
});
after(async () => {
  await browser.close();
  out.remove();
});

/** @param {import('playwright-core').BrowserContextOptions} [options] */
async function open(options) {
  /** @type {string[]} */
  const asked = [];
  const opened = await openPage(browser, 'about:blank', {viewport: {width: 900, height: 1200}, ...options});
  opened.page.on('request', (request) => asked.push(request.url()));
  await opened.page.goto(pathToFileURL(join(out.path, 'report.html')).href);
  await opened.page.locator('.cautions').waitFor();
  return {...opened, asked};
}

test('in the order of a reader’s questions, without any network', async () => {
  const {page, errors, asked, context} = await open();
  assert.deepEqual(await page.locator('h2').allInnerTexts(), ['What was analysed, and how good the data were', 'The answer', 'Zones', 'Closings', 'Alarms', 'Areas by flap and speed', 'The outing in traces', 'Sensors at the end', 'Settings and versions', 'Cautions']);
  assert.deepEqual(asked.filter((url) => !/^(file|blob|data):/.test(url)), []);
  assert.deepEqual(errors, []);
  await picture(page, 'report', true);
  await context.close();
});

test('numbers are those of the files', async () => {
  const {page, context} = await open();
  const rows = csv(join(out.path, 'closures.csv'));
  const summary = JSON.parse(readFileSync(join(out.path, 'summary.json'), 'utf8'));
  const {closures, areas, version, frames} = summary;
  const answer = await read(page, '.answer');
  const zones = new Set(rows.map((r) => r.zone).filter((z) => z !== '0')).size;
  assert.ok(answer.startsWith(`${closures.total} closings in ${zones} zones: ${closures.full} full, ${closures.short} short, ${closures.unclear} unclear.`), answer);
  const worst = rows.reduce((a, b) => (Number(b.shortfall) > Number(a.shortfall) ? b : a));
  assert.ok(answer.includes(`${Math.round(Number(worst.shortfall))} ± ${Math.round(Number(worst.shortfall_sd))} N, ${(100 * Number(worst.shortfall_share)).toFixed(1)} % of the rear downforce: closing ${worst.closure}, lap ${worst.lap}, zone ${worst.zone}`), answer);
  assert.ok((await read(page, '.facts')).replace(/\u2009| /g, '').includes(`${frames.used}used`));

  const table = (await page.locator('#closings tbody tr').allInnerTexts()).map((r) => r.replace(/\s+/g, ' ').trim());
  assert.equal(table.length, rows.length);
  rows.forEach((row, i) => {
    const words = `${row.verdict}${row.slow === '1' ? ', slow' : ''} ${row.closure} ${row.lap} ${row.zone} `;
    assert.ok(table[i].startsWith(words), `${table[i]} begins with ${words}`);
    const t95 = [row.t95, row.t95_low, row.t95_high].map((s) => Math.round(Number(s) * 1000));
    assert.ok(table[i].includes(`${t95[0]} (${t95[1]}–${t95[2]})`), `${table[i]}: ${t95}`);
    const p = Number(row.probability_short);
    assert.ok(table[i].includes(p > 0.99 ? '> 0.99' : p < 0.01 ? '< 0.01' : p.toFixed(2)), table[i]);
  });
  assert.equal(await page.locator('.closing-cell').count(), rows.length, 'each closing has its small picture');
  assert.equal(await page.locator('#alarms tbody tr').count(), 2, 'closing 6, short; closings 4 and 6, slow');
  const facts = await read(page, '.facts');
  assert.match(facts, /Air \d+\.\d( to \d+\.\d)? °C, \d+( to \d+)? hPa, \d+( to \d+)? % humidity, density 1\.\d{3}/);
  assert.match(facts, /Mass \d+\.\d ± \d+\.\d kg at the start.* kg of fuel a lap, .* kg by the beginning of the last of 3 laps/);
  assert.match(facts, /Smoothed areas use the whole outing/);
  assert.equal(await page.locator('.zone-report').count(), zones);
  assert.equal(await page.locator('.zone-closing').count(), rows.filter((r) => r.zone !== '0').length);

  const shut = (await page.locator('#areas tbody tr').first().innerText()).replace(/\s+/g, ' ');
  const {cla_rear} = areas.flap_closed;
  assert.ok(shut.includes(`${cla_rear.value.toFixed(2)} ± ${cla_rear.sd.toFixed(2)}`), `${shut}; ${cla_rear.value} ${cla_rear.sd}`);
  const sensors = await page.locator('#sensors tbody tr').count();
  assert.equal(sensors, Object.keys(summary.channels).length);
  assert.ok((await page.locator('main').innerText()).includes(`Holdfast ${version}`));
  await context.close();
});

test('prints on A4 in a handful of pages', async () => {
  const {page, context} = await open();
  const pdf = (await page.pdf({preferCSSPageSize: true, printBackground: true})).toString('latin1');
  const pages = [...pdf.matchAll(/\/Type\s*\/Page\b(?!s)/g)].length;
  assert.ok(pages >= 2 && pages <= 6, `${pages} pages`);
  const box = /\/MediaBox\s*\[\s*0 0 ([\d.]+) ([\d.]+)/.exec(pdf);
  assert.ok(box && Math.abs(Number(box[1]) - 595) < 2 && Math.abs(Number(box[2]) - 842) < 2, 'A4');
  await context.close();
});

test('nothing wider than the paper, nor than a phone', async () => {
  for (const width of [900, 390]) {
    const {page, context} = await open({viewport: {width, height: 900}});
    const over = await page.evaluate(() => document.documentElement.scrollWidth - document.documentElement.clientWidth);
    assert.equal(over, 0, `${width} px`);
    await context.close();
  }
  const {page, context} = await open({viewport: {width: 695, height: 1000}}); // A4 less its margins, px
  await page.emulateMedia({media: 'print'});
  const cut = await page.evaluate(() => [...document.querySelectorAll('table, svg')].filter((n) => n.getBoundingClientRect().right > document.documentElement.clientWidth + 1).map((n) => n.outerHTML.slice(0, 80)));
  assert.deepEqual(cut, []);
  await context.close();
});

test('axe-core finds nothing serious', async () => {
  const {page, context} = await open({bypassCSP: true});
  await page.evaluate(AXE);
  const {violations} = await page.evaluate(() => /** @type {any} */ (globalThis).axe.run(document, {resultTypes: ['violations']}));
  const serious = violations.filter((/** @type {any} */ v) => ['serious', 'critical'].includes(v.impact)).map((/** @type {any} */ v) => `${v.id}: ${v.nodes[0].html.slice(0, 120)} ${v.nodes[0].failureSummary}`);
  assert.deepEqual(serious, []);
  await context.close();
});
