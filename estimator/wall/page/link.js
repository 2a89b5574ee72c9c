// SPDX-License-Identifier: MIT
// The page's link to the program. Tries again by itself, ever more slowly up to five seconds, at once when the
// machine comes back onto a network or the page into view.

const FIRST_WAIT_MS = 250;
const LONGEST_WAIT_MS = 5000;

/** @typedef {"connecting"|"open"|"lost"} PageLink */

export class Link {
  /**
   * @param {string} url
   * @param {(message: import('./protocol.js').Message) => void} onMessage
   * @param {(state: PageLink) => void} onState
   */
  constructor(url, onMessage, onState) {
    this.url = url;
    this.onMessage = onMessage;
    this.onState = onState;
    this.wait = FIRST_WAIT_MS;
    /** @type {WebSocket|null} */
    this.socket = null;
    /** @type {ReturnType<typeof setTimeout>|undefined} */
    this.timer = undefined;
    addEventListener('online', () => this.again());
    addEventListener('offline', () => this.socket?.close());
    document.addEventListener('visibilitychange', () => {
      if (!document.hidden) this.again();
    });
    this.open();
  }

  open() {
    const socket = new WebSocket(this.url);
    this.socket = socket;
    socket.onmessage = (event) => {
      this.wait = FIRST_WAIT_MS;
      this.onMessage(JSON.parse(event.data));
    };
    socket.onopen = () => this.onState('open');
    socket.onclose = () => {
      if (this.socket !== socket) return;
      this.socket = null;
      this.onState('lost');
      // Up to a fifth sooner, so that many viewers do not all knock at the same moment.
      this.timer = setTimeout(() => this.open(), this.wait * (1 - 0.2 * Math.random()));
      this.wait = Math.min(LONGEST_WAIT_MS, this.wait * 1.7);
    };
  }

  /** Tries at once where it is waiting. */
  again() {
    if (this.socket) return;
    clearTimeout(this.timer);
    this.open();
  }

  /** @param {object} message @returns {boolean} whether it went out */
  send(message) {
    if (this.socket?.readyState !== WebSocket.OPEN) return false;
    this.socket.send(JSON.stringify(message));
    return true;
  }
}
