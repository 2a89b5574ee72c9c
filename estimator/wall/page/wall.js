// SPDX-License-Identifier: MIT
// What the parts of the page share: the outing, the viewer's preferences, the chosen closing, the link's state; and
// one drawing a frame at most, of those parts only that have something new.
import {Outing} from "./outing.js";
import {readPreferences, keepPreferences, applyPreferences} from "./preferences.js";
import {unknownReason} from "./words.js";

/** @typedef {{needs: string[], least_ms?: number, draw: () => void}} Part drawn when one of `needs` has changed, no more often than `least_ms` */

// The server speaks at least twice a second while data flow; longer silence is one.
const SILENT_MS = 1500;

export class Wall {
  constructor() {
    this.outing = new Outing();
    this.preferences = readPreferences();
    /** @type {import('./link.js').PageLink} */
    this.pageLink = 'connecting';
    this.heard = performance.now(); // when the newest message came
    /** @type {number|null} closing that the viewer chose; null follows the newest */
    this.chosen = null;
    /** @type {(id: number) => void} */
    this.acknowledge = () => {};
    /** @type {{part: Part, due: boolean, drawn: number}[]} */
    this.parts = [];
    this.pending = false;
    applyPreferences(this.preferences);
  }

  /** @param {Part} part */
  add(part) {
    this.parts.push({part, due: true, drawn: -Infinity});
    this.schedule();
  }

  /** @param {...string} what changed: a kind of message, "tick", "link", "chosen", "preferences" or "size" */
  touch(...what) {
    for (const entry of this.parts) if (entry.part.needs.some((need) => what.includes(need))) entry.due = true;
    this.schedule();
  }

  schedule() {
    if (this.pending || document.hidden) return;
    this.pending = true;
    requestAnimationFrame((now) => this.frame(now));
  }

  /** @param {number} now */
  frame(now) {
    this.pending = false;
    let late = false;
    for (const entry of this.parts) {
      if (!entry.due) continue;
      // Half a frame of grace, so that a part of 100 ms is drawn each sixth frame and not each seventh.
      if (now - entry.drawn < (entry.part.least_ms ?? 0) - 8) {
        late = true;
        continue;
      }
      entry.due = false;
      entry.drawn = now;
      entry.part.draw();
    }
    if (late) this.schedule();
  }

  /** @param {Partial<import('./preferences.js').Preferences>} change */
  prefer(change) {
    Object.assign(this.preferences, change);
    keepPreferences(this.preferences);
    applyPreferences(this.preferences);
    this.touch('preferences');
  }

  /** @param {number|null} number */
  choose(number) {
    this.chosen = number;
    this.touch('chosen');
  }

  /** Number of the closing that is looked at; 0 where there is none yet. */
  closing() {
    const numbers = this.outing.closingNumbers();
    if (this.chosen !== null && numbers.includes(this.chosen)) return this.chosen;
    return numbers[numbers.length - 1] ?? 0;
  }

  /** Goes to the closing before or after; past the newest means following. @param {number} step */
  stepClosing(step) {
    const numbers = this.outing.closingNumbers();
    const to = numbers.indexOf(this.closing()) + step;
    this.choose(to >= numbers.length - 1 ? null : numbers[Math.max(0, to)]);
  }

  /** Seconds since the newest data were young. */
  age() {
    return (this.outing.now?.age_s ?? 0) + (performance.now() - this.heard) / 1000;
  }

  /** Why nothing can be said of now, or null where it can. @returns {string|null} */
  whyUnknown() {
    const now = this.outing.now;
    if (this.outing.end || now?.link.state === 'ended') return 'the outing has ended';
    if (this.pageLink === 'lost') return 'link lost';
    if (this.pageLink === 'connecting' || !now) return 'nothing has come yet';
    if (now.link.state === 'silent') return 'nothing comes from the car';
    if (performance.now() - this.heard > SILENT_MS) return 'the program is silent';
    return unknownReason(now.flags);
  }
}

/** Width, height and line height of a node, in px. @param {Element} node */
export function measure(node) {
  const box = node.getBoundingClientRect();
  return {width: Math.max(80, Math.round(box.width)), height: Math.max(90, Math.round(box.height)), em: rem() * 0.8};
}

/** The root's font size in px: what one line of text is measured by. */
export function rem() {
  return parseFloat(getComputedStyle(document.documentElement).fontSize);
}
