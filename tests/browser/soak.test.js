// SPDX-License-Identifier: MIT
// 60 updates a second for a while: a minute, or HOLDFAST_SOAK_MINUTES. The page keeps its frame rate and its memory.
import {test, before, after} from 'node:test';
import assert from 'node:assert/strict';
import {StreamServer} from './support/stream_server.js';
import {launch, openPage, stands} from './support/browser.js';
import {soFar, now, health, columns, regrowthOf, closureOf, closingsBy} from './support/invented_outing.js';

const MINUTES = Number(process.env.HOLDFAST_SOAK_MINUTES ?? 1);
const UPDATES_HZ = 60;
const START = 352;

/** @type {import('playwright-core').Browser} */
let browser;
const server = new StreamServer();
before(async () => {
  browser = await launch();
});
after(async () => {
  await browser.close();
  await server.close();
});

/** Says everything that the program would between two instants of the outing. @param {number} from @param {number} to */
function say(from, to) {
  server.say(now(to, {samples: columns(from, to, 0.02)}));
  if (Math.floor(from * 2) !== Math.floor(to * 2)) server.say(health(to));
  // A closing grows for a second, twenty times a second, and is then judged.
  const next = closingsBy(from) + 1;
  const since = to - closureOf(next).time_closed;
  if (since > 0 && since < 1 && Math.floor(from * 20) !== Math.floor(to * 20)) server.say({kind: 'regrowth', ...regrowthOf(next, since)});
  if (closingsBy(to) >= next) server.say({kind: 'regrowth', ...regrowthOf(next)}, {kind: 'closure', ...closureOf(next)});
}

test(`${MINUTES} min at ${UPDATES_HZ} updates a second`, {timeout: (MINUTES + 2) * 60000}, async () => {
  const url = await server.listen();
  server.greeting = soFar(START);
  const {page, errors} = await openPage(browser, url);
  await stands(page, '#link', 'link up');
  const session = await page.context().newCDPSession(page);
  const heap_mb = async () => {
    await session.send('HeapProfiler.collectGarbage');
    const usage = /** @type {Record<string, number>} */ (/** @type {unknown} */ (await session.send('Runtime.getHeapUsage')));
    return (usage.usedSize + (usage.backingStorageSize ?? 0)) / 1e6; // with the typed arrays' room
  };
  await page.evaluate(() => {
    const counter = /** @type {any} */ (globalThis);
    counter.frames = 0;
    counter.longest_ms = 0;
    let last = performance.now();
    const count = (/** @type {number} */ at) => {
      counter.frames += 1;
      counter.longest_ms = Math.max(counter.longest_ms, at - last);
      last = at;
      requestAnimationFrame(count);
    };
    requestAnimationFrame(count);
  });

  const began = performance.now();
  let said = START;
  let updates = 0;
  const timer = setInterval(() => {
    const t = START + (performance.now() - began) / 1000;
    say(said, t);
    said = t;
    updates += 1;
  }, 1000 / UPDATES_HZ);

  /** @type {number[]} */
  const heaps = [];
  const rounds = Math.max(6, MINUTES);
  for (let i = 0; i < rounds; i += 1) {
    await page.waitForTimeout((MINUTES * 60000) / rounds);
    heaps.push(await heap_mb());
  }
  clearInterval(timer);
  const seconds = (performance.now() - began) / 1000;
  const {frames, longest_ms} = await page.evaluate(() => ({frames: /** @type {any} */ (globalThis).frames, longest_ms: /** @type {any} */ (globalThis).longest_ms}));
  const rate = frames / seconds;
  console.log(`soak: ${seconds.toFixed(0)} s, ${(updates / seconds).toFixed(1)} updates/s, ${rate.toFixed(1)} frames/s, longest frame ${longest_ms.toFixed(0)} ms, heap MB ${heaps.map((h) => h.toFixed(1)).join(' ')}`);
  await page.waitForTimeout(300);
  assert.equal(await page.locator('.zone-closing').count(), closingsBy(said), 'nothing was missed');
  assert.ok(rate > 50, `${rate.toFixed(1)} frames a second`);
  // The arrays stand ready from the start; what grows are closings, some kilobytes each.
  const grown = heaps[heaps.length - 1] - heaps[0];
  assert.ok(grown < 1 + 0.1 * MINUTES, `the heap grew by ${grown.toFixed(1)} MB`);
  assert.deepEqual(errors, []);
});
