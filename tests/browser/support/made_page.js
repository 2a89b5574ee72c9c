// SPDX-License-Identifier: MIT
// A page in the browser against a stream that the test makes: each test has a server and a page of its own, and fails
// where the browser's console showed an error.
import {before, after, beforeEach, afterEach} from 'node:test';
import assert from 'node:assert/strict';
import {StreamServer} from './stream_server.js';
import {launch, openPage, stands} from './browser.js';

export const T = 352; // where most tests join: lap 6; 18 closings

/** @type {import('playwright-core').Browser} */
let browser;
let url = '';
/** @type {string[]} errors that the browser's console showed in the test */
let errors = [];

/** The other side of the test's page. */
export const stage = {server: new StreamServer()};

before(async () => {
  browser = await launch();
});
after(() => browser.close());
beforeEach(async () => {
  stage.server = new StreamServer();
  url = await stage.server.listen();
  errors = [];
});
afterEach(async () => {
  for (const context of browser.contexts()) await context.close();
  await stage.server.close();
  assert.deepEqual(errors, []);
});

/** @param {object[]} greeting @param {import('playwright-core').BrowserContextOptions} [options] */
export async function open(greeting, options) {
  stage.server.greeting = greeting;
  const opened = await openPage(browser, url, options);
  errors = opened.errors;
  await stands(opened.page, '#link', /./);
  return opened.page;
}

/** Waits until Zones shows so many closings. @param {import('playwright-core').Page} page @param {number} count */
export async function closingsCount(page, count) {
  await page.waitForFunction((n) => document.querySelectorAll('.zone-closing').length === n, count);
}

/** Waits until the page has said so many things. @param {number} count */
export async function heard(count) {
  while (stage.server.heard.length < count) await new Promise((done) => setTimeout(done, 10));
  return stage.server.heard;
}
