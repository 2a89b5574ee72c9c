// SPDX-License-Identifier: MIT
// The areas by state of the flap and by speed, out of the outing's 10 Hz rows.

/** @typedef {import('./protocol.js').Quantity} Quantity */

const AREAS = /** @type {const} */ (['cla_front', 'cla_rear', 'cda']);
const BIN_MPS = 10;
const SLOWEST_MPS = 30; // below, the air's forces hardly stand out of the sensors' errors
const LEAST_ROWS = 10; // one second

/**
 * Mean weighted by inverse variance. Neighbouring estimates share their errors, so the uncertainty does not fall with
 * their number: it is the weighted root mean square of their own, or their spread where that is larger.
 * @param {Quantity[]} values @returns {Quantity|null}
 */
export function weightedMean(values) {
  const usable = values.filter(([v, sd]) => Number.isFinite(v) && sd > 0);
  if (usable.length === 0) return null;
  const weight = usable.reduce((sum, [, sd]) => sum + 1 / (sd * sd), 0);
  const mean = usable.reduce((sum, [v, sd]) => sum + v / (sd * sd), 0) / weight;
  const own = usable.length / weight;
  const spread = usable.reduce((sum, [v, sd]) => sum + (v - mean) ** 2 / (sd * sd), 0) / weight;
  return [mean, Math.sqrt(Math.max(own, spread))];
}

/**
 * @typedef {{flap: "shut"|"open", from: number, to: number, rows: number, areas: (Quantity|null)[]}} AreaRow
 */

/** @param {import('./series.js').Series} series @returns {AreaRow[]} for each state of the flap, by rising speed */
export function areasBySpeed(series) {
  const names = ['speed', 'flap', 'attached', ...AREAS.flatMap((name) => [name, `${name}_sd`])];
  const [, speed, flap, attached, ...areas] = series.window(series.first, series.newest, names, Infinity);
  /** @type {Map<string, Quantity[][]>} */
  const bins = new Map();
  speed.forEach((v, i) => {
    const f = flap[i];
    const a = attached[i];
    if (v === null || v < SLOWEST_MPS || f === null || a === null) return;
    // Steady flow only: the flap at an end of its travel, and its flow wholly there or wholly given up.
    const state = f < 0.02 && a > 0.98 ? 'shut' : f > 0.98 && a < 0.02 ? 'open' : null;
    if (state === null) return;
    const key = `${state} ${Math.floor(v / BIN_MPS)}`;
    const columns = bins.get(key) ?? AREAS.map(() => []);
    AREAS.forEach((_, k) => {
      const value = areas[2 * k][i];
      const sd = areas[2 * k + 1][i];
      if (value !== null && sd !== null) columns[k].push([value, sd]);
    });
    bins.set(key, columns);
  });
  return [...bins]
    .map(([key, columns]) => {
      const [state, bin] = key.split(' ');
      return {flap: /** @type {"shut"|"open"} */ (state), from: Number(bin) * BIN_MPS, to: (Number(bin) + 1) * BIN_MPS, rows: columns[0].length, areas: columns.map(weightedMean)};
    })
    .filter((row) => row.rows >= LEAST_ROWS)
    .sort((a, b) => b.flap.localeCompare(a.flap) || a.from - b.from);
}
