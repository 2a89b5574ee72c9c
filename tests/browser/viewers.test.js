// SPDX-License-Identifier: MIT
// Many at once, from other machines: the real programs, a page that asks for its token, two pages in browsers, seventeen
// viewers that only read and one that is asleep. None of them changes a result.
import {test, before, after} from 'node:test';
import assert from 'node:assert/strict';
import {connect} from 'node:net';
import {readFileSync} from 'node:fs';
import {join} from 'node:path';
import {launch, openPage, read, stands} from './support/browser.js';
import {bundled, csv, folder, freePort, run, until} from './support/programs.js';

/** @type {import('playwright-core').Browser} */
let browser;
const watched = folder();
const unwatched = folder();

before(async () => {
  browser = await launch();
});
after(async () => {
  await browser.close();
  watched.remove();
  unwatched.remove();
});

/**
 * A viewer without a browser. Resolves when it has been let in.
 * @param {number} port @param {string} cookie @param {boolean} asleep never reads what it is sent
 * @returns {Promise<import('node:net').Socket>}
 */
function viewer(port, cookie, asleep) {
  return new Promise((done, fail) => {
    const socket = connect(port, '127.0.0.1');
    socket.on('error', fail);
    socket.once('data', (data) => {
      if (asleep) socket.pause();
      else socket.on('data', () => {});
      if (data.toString().startsWith('HTTP/1.1 101')) done(socket);
      else fail(new Error(data.toString().split('\r\n')[0]));
    });
    const host = `127.0.0.1:${port}`;
    socket.write(`GET /wall/stream HTTP/1.1\r\nHost: ${host}\r\nOrigin: http://${host}\r\nCookie: ${cookie}\r\nConnection: Upgrade\r\nUpgrade: websocket\r\nSec-WebSocket-Version: 13\r\nSec-WebSocket-Key: dGhlIHNhbXBsZSBub25jZQ==\r\n\r\n`);
  });
}

test('twenty viewers with the token, one of them asleep, cost the estimator nothing', async () => {
  const {log, car} = bundled('stuck_sensor');
  const [linkPort, pagePort] = [await freePort(), await freePort()];
  const endpoint = `tcp://127.0.0.1:${linkPort}`;
  const live = run('holdfast', ['live', '--from', endpoint, '--car', car, '--out', watched.path, '--page', `0.0.0.0:${pagePort}`]);
  /** @type {import('node:net').Socket[]} */
  const sockets = [];
  try {
    await until(async () => /page at http:\/\/\S+\?token=[0-9a-f]{32}/.test(live.told.text), 20000, 'the address is printed with its token');
    const token = /\?token=([0-9a-f]{32})/.exec(live.told.text)?.[1];
    const url = `http://127.0.0.1:${pagePort}/`;

    // Without the token there is nothing to see; with it the address bar is clean, and the page lives.
    const stranger = await openPage(browser, url);
    assert.match(await read(stranger.page, 'body'), /Use the address with its token/);
    await stranger.context.close();
    const first = await openPage(browser, `${url}?token=${token}`);
    assert.equal(first.page.url(), url);
    await first.page.locator('#answers').waitFor();
    const cookies = await first.context.cookies();
    assert.deepEqual(cookies.map((c) => [c.value, c.httpOnly, c.sameSite]), [[token, true, 'Lax']]);
    const second = await openPage(browser, `${url}?token=${token}`, {viewport: {width: 390, height: 844}});
    const cookie = `${cookies[0].name}=${cookies[0].value}`;
    await assert.rejects(viewer(pagePort, '', false), /403/);
    for (let i = 0; i < 18; i += 1) sockets.push(await viewer(pagePort, cookie, i === 17));

    const node = run('carnode', ['play', log, '--car', car, '--bind', endpoint, '--pace', '20', '--when-full', 'wait']);
    assert.equal(await node.ended, 0, node.told.text);
    for (const {page} of [first, second]) await stands(page, '#link', 'ended, complete');
    assert.equal(await live.ended, 0, live.told.text);
    const rows = csv(join(watched.path, 'closures.csv'));
    assert.equal(rows.length, 3);
    for (const {page, errors} of [first, second]) {
      assert.equal(await page.locator('.zone-closing').count(), rows.length);
      await stands(page, '#answers', /load_rr\s*stands still/);
      assert.deepEqual(errors, []);
    }
    const replay = run('holdfast', ['replay', log, '--car', car, '--out', unwatched.path, '--as-live']);
    assert.equal(await replay.ended, 0, replay.told.text);
    for (const file of ['closures.csv', 'estimates.csv']) {
      assert.ok(readFileSync(join(watched.path, file)).equals(readFileSync(join(unwatched.path, file))), `${file} is the same, watched or not`);
    }
  } finally {
    for (const socket of sockets) socket.destroy();
    live.child.kill();
  }
});
