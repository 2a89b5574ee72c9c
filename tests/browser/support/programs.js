// SPDX-License-Identifier: MIT
// The real programs: a node that plays a bundled outing, the estimator that serves the page, and their files.
import {spawn} from 'node:child_process';
import {createServer} from 'node:net';
import {mkdtempSync, readFileSync, rmSync} from 'node:fs';
import {tmpdir} from 'node:os';
import {join} from 'node:path';
import {fileURLToPath} from 'node:url';

const ROOT = fileURLToPath(new URL('../../../', import.meta.url));
const BIN = process.env.HOLDFAST_BIN_DIR ?? join(ROOT, 'build/bin');

/** @param {string} outing folder of replay_logs */
export function bundled(outing) {
  return {log: join(ROOT, 'replay_logs', outing, 'outing.hfr'), car: join(ROOT, 'replay_logs', outing, 'car.toml')};
}

/** @returns {Promise<number>} a loopback port that is free now */
export function freePort() {
  return new Promise((done) => {
    const server = createServer().listen(0, '127.0.0.1', () => {
      const {port} = /** @type {import('node:net').AddressInfo} */ (server.address());
      server.close(() => done(port));
    });
  });
}

/** @param {string} name @param {string[]} words */
export function run(name, words) {
  const child = spawn(join(BIN, name), words, {stdio: ['ignore', 'pipe', 'pipe']});
  const told = {text: ''};
  child.stdout.on('data', (data) => (told.text += data));
  child.stderr.on('data', (data) => (told.text += data));
  /** @type {Promise<number|null>} */
  const ended = new Promise((done, fail) => {
    child.on('exit', (code) => done(code));
    child.on('error', fail);
  });
  return {child, told, ended};
}

/** A folder of its own. @returns {{path: string, remove: () => void}} */
export function folder() {
  const path = mkdtempSync(join(tmpdir(), 'holdfast-browser-'));
  return {path, remove: () => rmSync(path, {recursive: true, force: true})};
}

/** Rows of a CSV file whose cells hold no commas, as records of text. @param {string} path @returns {Record<string, string>[]} */
export function csv(path) {
  const [head, ...rows] = readFileSync(path, 'utf8').trimEnd().split('\n');
  const names = head.split(',');
  return rows.map((row) => Object.fromEntries(row.split(',').map((cell, i) => [names[i], cell])));
}

/** Waits until a condition holds. @param {() => boolean|Promise<boolean>} holds @param {number} [limit_ms] @param {string} [what] */
export async function until(holds, limit_ms = 20000, what = 'condition') {
  const end = Date.now() + limit_ms;
  while (!(await holds())) {
    if (Date.now() > end) throw new Error(`waited ${limit_ms} ms in vain: ${what}`);
    await new Promise((done) => setTimeout(done, 50));
  }
}
