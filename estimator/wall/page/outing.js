// SPDX-License-Identifier: MIT
// All that is known of the outing, built from the messages of the stream. No drawing, no clock.
import {Series} from "./series.js";

/** @typedef {import('./protocol.js').Closure} Closure */
/** @typedef {import('./protocol.js').Regrowth} Regrowth */
/** @typedef {import('./protocol.js').Alarm} Alarm */
/** @typedef {import('./protocol.js').Message} Message */

export class Outing {
  /** @type {import('./protocol.js').Hello|null} */
  hello = null;
  series = new Series();
  /** @type {Map<number, Closure>} by number */
  closures = new Map();
  /** @type {Map<number, Regrowth>} by number of the closing */
  regrowths = new Map();
  /** @type {Map<number, Alarm>} by id */
  alarms = new Map();
  /** @type {import('./protocol.js').ChannelHealth[]} */
  health = [];
  /** @type {Omit<import('./protocol.js').Now, 'samples'>|null} */
  now = null;
  /** @type {import('./protocol.js').End|null} */
  end = null;

  /** Takes one message in; unknown kinds, which a newer program may send, are left alone. @param {Message} message */
  apply(message) {
    switch (message.kind) {
      case 'hello':
        // A greeting begins the outing anew: after a reconnection all of it comes again.
        Object.assign(this, new Outing(), {hello: message});
        break;
      case 'history':
        this.series.addHistory(message.columns);
        break;
      case 'closures':
        for (const closure of message.list) this.closures.set(closure.number, closure);
        break;
      case 'closure':
        this.closures.set(message.number, /** @type {any} */ (message));
        break;
      case 'regrowths':
        for (const regrowth of message.list) this.regrowths.set(regrowth.closure, regrowth);
        break;
      case 'regrowth':
        this.regrowths.set(message.closure, /** @type {any} */ (message));
        break;
      case 'alarms':
        for (const alarm of message.list) this.alarms.set(alarm.id, alarm);
        break;
      case 'alarm':
        this.alarms.set(message.id, /** @type {any} */ (message));
        break;
      case 'alarm_acknowledged': {
        const alarm = this.alarms.get(message.id);
        if (alarm) alarm.acknowledged = true;
        break;
      }
      case 'health':
        this.health = message.channels;
        break;
      case 'now': {
        const {samples, ...rest} = message;
        this.series.addSamples(samples);
        this.now = /** @type {any} */ (rest);
        break;
      }
      case 'end':
        this.end = {complete: message.complete, summary: message.summary, conditions: message.conditions ?? null};
        break;
    }
  }

  /** Numbers of all closings that there is a picture or a record of. @returns {number[]} */
  closingNumbers() {
    return [...new Set([...this.closures.keys(), ...this.regrowths.keys()])].filter((n) => n > 0).sort((a, b) => a - b);
  }

  /** Closings in their order. @returns {Closure[]} */
  closuresInOrder() {
    return [...this.closures.values()].sort((a, b) => a.number - b.number);
  }
}
