// SPDX-License-Identifier: MIT
// Serves the page's files and a WebSocket that says what a test tells it to: the page's other side, made by hand, so
// that a test decides what comes and when. Implements of RFC 6455 what a text stream on loopback needs.
import {createServer} from 'node:http';
import {createHash} from 'node:crypto';
import {readFile} from 'node:fs/promises';
import {fileURLToPath} from 'node:url';
import {join, extname} from 'node:path';

const PAGE = fileURLToPath(new URL('../../../estimator/wall/page/', import.meta.url));
const TYPES = /** @type {Record<string, string>} */ ({'.html': 'text/html', '.js': 'text/javascript', '.css': 'text/css'});
const CSP = "default-src 'none'; script-src 'self'; style-src 'self'; connect-src 'self'; img-src 'self' data:; frame-ancestors 'none'; base-uri 'none'; form-action 'none'";

/** @param {string} text one unmasked frame */
function frame(text) {
  const body = Buffer.from(text);
  const head = body.length < 126 ? Buffer.from([0x81, body.length]) : body.length < 65536 ? Buffer.from([0x81, 126, body.length >> 8, body.length & 255]) : Buffer.alloc(10);
  if (body.length >= 65536) {
    head[0] = 0x81;
    head[1] = 127;
    head.writeBigUInt64BE(BigInt(body.length), 2);
  }
  return Buffer.concat([head, body]);
}

export class StreamServer {
  constructor() {
    /** @type {Set<import('node:stream').Duplex>} */
    this.viewers = new Set();
    /** @type {object[]} what each newcomer is sent */
    this.greeting = [];
    /** @type {any[]} what the page said */
    this.heard = [];
    this.open = true; // false: knocks are refused
    this.server = createServer((request, response) => void this.serve(request.url ?? '/', response));
    this.server.on('upgrade', (request, socket) => this.upgrade(request, socket));
  }

  /** @param {number} [port] */
  async listen(port = 0) {
    await new Promise((done) => this.server.listen(port, '127.0.0.1', () => done(undefined)));
    this.port = /** @type {import('node:net').AddressInfo} */ (this.server.address()).port;
    return `http://127.0.0.1:${this.port}/`;
  }

  /** @param {string} url @param {import('node:http').ServerResponse} response */
  async serve(url, response) {
    const name = url.split('?')[0] === '/' ? 'index.html' : url.replace('/page/', '');
    const path = name.startsWith('uPlot') ? join(PAGE, 'node_modules/uplot/dist', name) : join(PAGE, name);
    try {
      const body = await readFile(path);
      response.writeHead(200, {'content-type': TYPES[extname(name)] ?? 'application/octet-stream', 'content-security-policy': CSP});
      response.end(body);
    } catch {
      response.writeHead(404).end();
    }
  }

  /** @param {import('node:http').IncomingMessage} request @param {import('node:stream').Duplex} socket */
  upgrade(request, socket) {
    if (!this.open || request.url?.split('?')[0] !== '/wall/stream') {
      socket.destroy();
      return;
    }
    const accept = createHash('sha1').update(`${request.headers['sec-websocket-key']}258EAFA5-E914-47DA-95CA-C5AB0DC85B11`).digest('base64');
    socket.write(`HTTP/1.1 101 Switching Protocols\r\nUpgrade: websocket\r\nConnection: Upgrade\r\nSec-WebSocket-Accept: ${accept}\r\n\r\n`);
    socket.on('data', (data) => this.hear(data));
    socket.on('close', () => this.viewers.delete(socket));
    socket.on('error', () => this.viewers.delete(socket));
    for (const message of this.greeting) socket.write(frame(JSON.stringify(message)));
    this.viewers.add(socket);
  }

  /** Short masked text frames, which is all that the page sends. @param {Buffer} data */
  hear(data) {
    if ((data[0] & 15) !== 1) return;
    const length = data[1] & 127;
    const mask = data.subarray(2, 6);
    const text = Buffer.from(data.subarray(6, 6 + length).map((byte, i) => byte ^ mask[i % 4])).toString();
    this.heard.push(JSON.parse(text));
  }

  /** @param {...object} messages */
  say(...messages) {
    for (const message of messages) {
      const bytes = frame(JSON.stringify(message));
      for (const viewer of this.viewers) viewer.write(bytes);
    }
  }

  /** Cuts every viewer off; `open` decides whether they may come back. */
  cut() {
    for (const viewer of this.viewers) viewer.destroy();
    this.viewers.clear();
  }

  async close() {
    this.cut();
    await new Promise((done) => {
      this.server.close(() => done(undefined));
      this.server.closeAllConnections();
    });
  }
}
