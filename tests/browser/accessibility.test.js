// SPDX-License-Identifier: MIT
// axe-core finds nothing serious in any state of the page.
import {test, before, after} from 'node:test';
import assert from 'node:assert/strict';
import {readFileSync} from 'node:fs';
import {StreamServer} from './support/stream_server.js';
import {launch, openPage, stands} from './support/browser.js';
import {soFar} from './support/invented_outing.js';

const AXE = readFileSync(new URL('node_modules/axe-core/axe.min.js', import.meta.url), 'utf8');

/** @type {import('playwright-core').Browser} */
let browser;
const server = new StreamServer();
let url = '';

before(async () => {
  browser = await launch();
  url = await server.listen();
});
after(async () => {
  await browser.close();
  await server.close();
});

/** @type {[string, import('playwright-core').BrowserContextOptions, (page: import('playwright-core').Page) => Promise<void>][]} */
const STATES = [
  ['light', {colorScheme: 'light'}, async () => {}],
  ['dark', {colorScheme: 'dark'}, async () => {}],
  ['phone', {viewport: {width: 390, height: 844}}, async () => {}],
  ['large figures, dark', {colorScheme: 'dark'}, (page) => page.keyboard.press('f')],
  ['a slow closing', {}, (page) => page.locator('.zones [data-closing="11"] .hit').click()],
  ['help', {}, (page) => page.keyboard.press('?')],
  ['options', {}, (page) => page.keyboard.press('o')],
  [
    'link lost',
    {},
    async (page) => {
      server.open = false;
      server.cut();
      await page.locator('#lost').waitFor({state: 'visible'});
      server.open = true;
    },
  ],
];

for (const [name, options, act] of STATES) {
  test(name, async () => {
    server.greeting = soFar(352, {fault: true});
    const {page, context} = await openPage(browser, url, {...options, bypassCSP: true});
    await stands(page, '#regrowth', 'closing 18');
    await act(page);
    await page.evaluate(AXE);
    const result = await page.evaluate(() => /** @type {any} */ (globalThis).axe.run(document, {resultTypes: ['violations']}));
    const serious = result.violations.filter((/** @type {any} */ v) => ['serious', 'critical'].includes(v.impact));
    const told = serious.map((/** @type {any} */ v) => `${v.id}: ${v.nodes.map((/** @type {any} */ n) => `${n.html.slice(0, 120)} ${n.failureSummary}`).join('\n  ')}`);
    await context.close();
    assert.deepEqual(told, []);
  });
}
