// SPDX-License-Identifier: MIT
// Samples over time in typed arrays: the whole outing at 10 Hz, and the newest minutes at the stream's rate in a ring.
// What is not known is NaN here and null outside.

/** @typedef {import('./protocol.js').Columns} Columns */

/** Columns of a sample beside its time "t"; SI. */
export const COLUMN_NAMES = [
  'speed', 'flap', 'load_front', 'load_rear', 'cla_front', 'cla_front_sd', 'cla_rear', 'cla_rear_sd', 'cda', 'cda_sd',
  'attached', 'downforce_front', 'downforce_front_sd', 'downforce_rear', 'downforce_rear_sd', 'drag', 'drag_sd',
];

const HISTORY_STEP_S = 0.1;
const FIRST_CAPACITY = 72000; // two hours at 10 Hz, so that an ordinary outing never makes the arrays grow
const RECENT_CAPACITY = 16384; // five minutes at the stream's 50 rows a second

/** Rows in time order; the oldest are overwritten where `ring` is set, else the arrays grow. */
class Rows {
  /** @param {number} capacity @param {boolean} ring */
  constructor(capacity, ring) {
    this.ring = ring;
    this.capacity = capacity;
    this.time = new Float64Array(capacity);
    /** @type {Record<string, Float32Array>} */
    this.columns = Object.fromEntries(COLUMN_NAMES.map((name) => [name, new Float32Array(capacity)]));
    this.written = 0; // rows ever appended
  }

  get count() {
    return Math.min(this.written, this.capacity);
  }

  /** Place in the arrays of the i-th oldest row. @param {number} i */
  place(i) {
    return this.written > this.capacity ? (this.written + i) % this.capacity : i;
  }

  /** @param {number} i */
  timeAt(i) {
    return this.time[this.place(i)];
  }

  /** @param {Columns} source @param {number} row */
  append(source, row) {
    if (!this.ring && this.written === this.capacity) this.grow();
    const at = this.written % this.capacity;
    this.time[at] = Number(source.t[row]);
    for (const name of COLUMN_NAMES) this.columns[name][at] = source[name]?.[row] ?? NaN;
    this.written += 1;
  }

  grow() {
    this.capacity *= 2;
    const time = new Float64Array(this.capacity);
    time.set(this.time);
    this.time = time;
    for (const name of COLUMN_NAMES) {
      const longer = new Float32Array(this.capacity);
      longer.set(this.columns[name]);
      this.columns[name] = longer;
    }
  }

  /** Index of the first row at or after t. @param {number} t */
  firstFrom(t) {
    let low = 0;
    let high = this.count;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (this.timeAt(middle) < t) low = middle + 1;
      else high = middle;
    }
    return low;
  }
}

export class Series {
  constructor() {
    this.history = new Rows(FIRST_CAPACITY, false);
    this.recent = new Rows(RECENT_CAPACITY, true);
    this.nextHistory = -Infinity;
  }

  get first() {
    return this.history.count ? this.history.timeAt(0) : NaN;
  }

  get newest() {
    if (this.recent.count) return this.recent.timeAt(this.recent.count - 1);
    return this.history.count ? this.history.timeAt(this.history.count - 1) : NaN;
  }

  /** Rows of the outing so far, at 10 Hz or less. @param {Columns} columns */
  addHistory(columns) {
    for (let row = 0; row < columns.t.length; row += 1) this.history.append(columns, row);
    const count = this.history.count;
    if (count) this.nextHistory = this.history.timeAt(count - 1) + HISTORY_STEP_S;
  }

  /** New samples at the stream's rate; rows that are not newer than the last are left out. @param {Columns} columns */
  addSamples(columns) {
    for (let row = 0; row < (columns.t?.length ?? 0); row += 1) {
      const t = Number(columns.t[row]);
      if (t <= this.newest) continue;
      this.recent.append(columns, row);
      if (t < this.nextHistory) continue;
      this.history.append(columns, row);
      this.nextHistory = Math.max(this.nextHistory + HISTORY_STEP_S, t + HISTORY_STEP_S / 2);
    }
  }

  /** Newest value of a column, null where it is not known. @param {string} name @returns {number|null} */
  latest(name) {
    const rows = this.recent.count ? this.recent : this.history;
    if (!rows.count) return null;
    const value = rows.columns[name][rows.place(rows.count - 1)];
    return Number.isFinite(value) ? value : null;
  }

  /** Source time at which a column was last known, null where it is not in the ring. @param {string} name */
  lastKnown(name) {
    const rows = this.recent.count ? this.recent : this.history;
    for (let i = rows.count - 1; i >= 0; i -= 1) {
      if (Number.isFinite(rows.columns[name][rows.place(i)])) return rows.timeAt(i);
    }
    return null;
  }

  /**
   * At most `most` rows of [from, to], from the finest store that reaches back to `from` or to the beginning. Rows are picked by their
   * running number, so that the same ones stay picked while the window moves.
   * @param {number} from @param {number} to @param {string[]} names @param {number} most
   * @returns {(number|null)[][]} time, then a column for each name
   */
  window(from, to, names, most) {
    const fine = this.recent.count > 0 && this.recent.timeAt(0) <= Math.max(from, this.first);
    const rows = fine ? this.recent : this.history;
    const first = Math.max(0, rows.firstFrom(from) - 1);
    const end = Math.min(rows.count, rows.firstFrom(to) + 1);
    const stride = Math.max(1, 2 ** Math.ceil(Math.log2((end - first) / most)));
    const oldest = rows.written - rows.count;
    /** @type {(number|null)[][]} */
    const out = [[], ...names.map(() => [])];
    for (let i = first + ((stride - ((oldest + first) % stride)) % stride); i < end; i += stride) {
      const place = rows.place(i);
      out[0].push(rows.time[place]);
      names.forEach((name, k) => {
        const value = rows.columns[name][place];
        out[k + 1].push(Number.isFinite(value) ? value : null);
      });
    }
    return out;
  }
}
