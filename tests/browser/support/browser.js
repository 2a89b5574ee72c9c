// SPDX-License-Identifier: MIT
// The browser of the tests, and what they keep asking of it.
import {mkdirSync} from 'node:fs';
import {fileURLToPath} from 'node:url';
import {join} from 'node:path';
import {chromium} from 'playwright-core';

const EXECUTABLE = process.env.HOLDFAST_CHROMIUM ?? '/usr/bin/chromium';
const ARTEFACTS = process.env.HOLDFAST_ARTEFACTS ?? fileURLToPath(new URL('../../../build/artefacts/', import.meta.url));

export function launch() {
  return chromium.launch({
    executablePath: EXECUTABLE,
    headless: true,
    args: ['--no-sandbox', '--disable-gpu', '--no-first-run', '--disable-background-networking', '--disable-component-update', '--disable-sync', '--no-default-browser-check', '--enable-precise-memory-info'],
  });
}

/**
 * A page that tells of its own errors: reading `errors` at the end of a test shows what a person would find in the
 * browser's console.
 * @param {import('playwright-core').Browser} browser @param {string} url @param {import('playwright-core').BrowserContextOptions} [options]
 */
export async function openPage(browser, url, options = {}) {
  const context = await browser.newContext({viewport: {width: 1366, height: 768}, reducedMotion: 'reduce', ...options});
  const page = await context.newPage();
  /** @type {string[]} */
  const errors = [];
  page.on('pageerror', (error) => errors.push(String(error)));
  page.on('console', (message) => {
    // Refused connections are the tests' own doing.
    if (message.type() === 'error' && !/WebSocket|ERR_CONNECTION/.test(message.text())) errors.push(message.text());
  });
  await page.goto(url);
  return {page, context, errors};
}

/** @param {import('playwright-core').Page} page @param {string} name @param {boolean} [full] */
export async function picture(page, name, full = false) {
  mkdirSync(ARTEFACTS, {recursive: true});
  await page.screenshot({path: join(ARTEFACTS, `${name}.png`), fullPage: full});
}

/** Text of a node as a person reads it, on one line. @param {import('playwright-core').Page} page @param {string} selector */
export async function read(page, selector) {
  return (await page.locator(selector).first().innerText()).replace(/\s+/g, ' ').trim();
}

/** Waits until text stands in a node. @param {import('playwright-core').Page} page @param {string} selector @param {string|RegExp} text */
export async function stands(page, selector, text) {
  await page.locator(selector).filter({hasText: text}).first().waitFor({timeout: 30000});
}
