// SPDX-License-Identifier: MIT
// An outing that never was, as the messages of the stream: three braking zones, a lap of 60 s, every number a simple
// formula, so that a test can say what the page has to show. No randomness.

export const LAP_S = 60;
const ZONE_AT_S = [12, 31, 50]; // of each lap: the closing command
const ZONES = [1, 2, 4];
const CHORD_M = 0.25;
const STEP_S = 0.02;

/** Closings that differ from the plain one, by number. @type {Record<number, object>} */
const ODD = {
  11: {tau: 0.16, slow: true, verdict: 'short', shortfall: [1703, 175], margin: [-0.37, 0.083]},
  13: {tau: 0.09, slow: true, verdict: 'full', shortfall: [96, 40], margin: [0.04, 0.03]},
  14: {plateau: 0.49, slow: true, whole: false, verdict: 'short', shortfall: [2621, 90], margin: null},
  15: {verdict: 'unclear', shortfall: [260, 190], margin: [0.004, 0.05]},
};

/** @param {number} number from 1 */
export function closureOf(number) {
  const lap = Math.floor((number - 1) / 3) + 1;
  const place = (number - 1) % 3;
  const odd = /** @type {any} */ (ODD[number] ?? {});
  const command = (lap - 1) * LAP_S + ZONE_AT_S[place];
  const closed = command + 0.09;
  const tau = odd.tau ?? 0.03 + 0.002 * ((number * 7) % 5);
  const whole = odd.whole ?? true;
  const t95 = tau * Math.log(20);
  const brake = closed + 0.2 + 0.03 * place;
  const speed = 90 + place;
  return {
    number,
    lap,
    zone: ZONES[place],
    time_command: command,
    time_closed: closed,
    speed,
    closing_time: 0.08,
    tau: [tau, 0.2 * tau],
    t95: whole ? t95 : null,
    t95_low: whole ? t95 * 0.75 : null,
    t95_high: whole ? t95 * 1.3 : null,
    plateau: odd.plateau ?? 1,
    chords: whole ? (t95 * speed) / CHORD_M : null,
    whole,
    time_brake: brake,
    margin: 'margin' in odd ? odd.margin : [brake - closed - t95, 0.018],
    shortfall: odd.shortfall ?? [40 + number, 30],
    shortfall_share: (odd.shortfall?.[0] ?? 40 + number) / 12000,
    probability_short: odd.verdict === 'short' ? 0.99 : 0.01,
    probability_slow: number > 3 ? (odd.slow ? 0.98 : 0.02) : null,
    slow: odd.slow ?? false,
    verdict: odd.verdict ?? 'full',
    usual_known: number > 3,
  };
}

/** @param {number} number @param {number} [knownUntil] seconds after shut; the whole curve where absent */
export function regrowthOf(number, knownUntil = Infinity) {
  const c = closureOf(number);
  const t = Array.from({length: 71}, (_, i) => -0.2 + 0.02 * i);
  const tau = c.tau[0];
  const share = t.map((at) => c.plateau * (1 - Math.exp(-Math.max(0, at + 0.01) / tau)));
  const half = t.map((at, i) => (at > knownUntil ? 0.2 : 0.06) * Math.min(1, share[i] * 4) * Math.exp(-Math.max(0, at) / 0.5));
  return {
    closure: number,
    zone: c.zone,
    final: !Number.isFinite(knownUntil),
    shut: true,
    time_shut: c.time_closed,
    time_command: c.time_command,
    chord_time: CHORD_M / c.speed,
    known_until: Math.min(knownUntil, 1.2),
    t,
    share,
    low: share.map((s, i) => Math.max(0, s - half[i])),
    high: share.map((s, i) => Math.min(1, s + half[i] * 0.8)),
    flap: {t: [-0.2, -0.09, -0.07, -0.04, -0.01, 0, 1.2], position: [1, 1, 0.9, 0.5, 0.1, 0, 0]},
  };
}

/** Where a closing of `t` stands: its flap shut since, in seconds; null while the flap is open or no closing came. */
function sinceShut(/** @type {number} */ t) {
  const inLap = t % LAP_S;
  const open = ZONE_AT_S.some((at) => inLap > at - 8 && inLap < at + 0.05);
  const last = [...ZONE_AT_S].reverse().find((at) => inLap >= at + 0.05);
  return {open, since: open ? null : inLap - (last ?? -10) - 0.09};
}

const COLUMNS = ['t', 'speed', 'flap', 'load_front', 'load_rear', 'cla_front', 'cla_front_sd', 'cla_rear', 'cla_rear_sd', 'cda', 'cda_sd', 'attached', 'downforce_front', 'downforce_front_sd', 'downforce_rear', 'downforce_rear_sd', 'drag', 'drag_sd'];

/** A row of the traces at t. @param {number} t @returns {number[]} in the order of the columns */
export function rowAt(t) {
  const inLap = t % LAP_S;
  const {open, since} = sinceShut(t);
  const next = ZONE_AT_S.find((at) => at > inLap) ?? LAP_S + ZONE_AT_S[0];
  const speed = 62 + 30 * Math.exp(-(next - inLap) / 6) - 4 * Math.cos(inLap / 3);
  const attached = open ? 0 : 1 - Math.exp(-Math.max(0, since ?? 0) / 0.04);
  const sd = 0.05 + 0.8 * Math.exp(-t / 8);
  const q = 0.5 * 1.2 * speed * speed;
  const front = 1.72 + 0.08 * Math.sin(t / 9);
  const rear = 1.4 + 1.15 * attached + 0.05 * Math.sin(t / 7);
  const drag = 0.9 + 0.28 * attached;
  return [t, speed, open ? 1 : 0, 3300 + front * q, 4100 + rear * q, front, sd, rear, sd * 1.3, drag, sd * 0.5, attached, front * q, sd * q, rear * q, sd * 1.3 * q, drag * q, sd * 0.5 * q];
}

/** @param {number} from @param {number} to @param {number} step */
export function columns(from, to, step) {
  /** @type {Record<string, number[]>} */
  const out = Object.fromEntries(COLUMNS.map((name) => [name, []]));
  for (let k = Math.max(0, Math.ceil(from / step - 1e-6)); k * step < to - 1e-9; k += 1) {
    rowAt(k * step).forEach((value, i) => out[COLUMNS[i]].push(value));
  }
  return out;
}

export const CHANNELS = [
  {name: 'speed', unit: 'm/s'}, {name: 'load_fl', unit: 'N'}, {name: 'load_fr', unit: 'N'}, {name: 'load_rl', unit: 'N'}, {name: 'load_rr', unit: 'N'},
  {name: 'flap_position', unit: '-'}, {name: 'brake_pressure', unit: 'Pa'}, {name: 'accel_x', unit: 'm/s^2'}, {name: 'ride_height_front', unit: 'm'}, {name: 'ride_height_rear_left', unit: 'm'}, {name: 'pitot_pressure', unit: 'Pa'},
];

/** @param {number} t @param {{fault?: boolean}} [how] */
export function health(t, how = {}) {
  const values = [rowAt(t)[1], 4100, 4180, 5230, 5190, 0, 3.1e6, -2.4, 0.0312, 0.0448, null];
  return {
    kind: 'health',
    channels: CHANNELS.map(({name}, i) => {
      const bad = how.fault === true && name === 'load_rr';
      const absent = name === 'pitot_pressure';
      const ratio = bad ? 6.1 : ((i * 37) % 60) / 100;
      return {
        name,
        trust: absent ? 'absent' : bad ? 'distrusted' : 'good',
        fault: bad ? 'stuck' : 'none',
        since: bad ? 341.2 : 0,
        rate_hz: absent ? null : i === 8 ? 100 : 400,
        samples: Math.round(t * 400),
        gaps: i === 3 ? 2 : 0,
        repeats: 0,
        not_finite: 0,
        out_of_range: 0,
        gated: bad ? 412 : i,
        value: values[i],
        innovation: absent ? null : (i % 2 ? -1 : 1) * Math.sqrt(ratio) * 30,
        innovation_sd: absent ? null : 10,
        test_ratio: absent ? null : ratio,
        age_s: absent ? null : 0.003,
      };
    }),
  };
}

/** @param {number} t @param {object} [change] */
export function now(t, change = {}) {
  return {kind: 'now', t, flags: ['ground_reference'], lap: Math.floor(t / LAP_S) + 1, lap_distance: (t % LAP_S) * 65, age_s: 0.02, link: {state: 'up', messages: Math.round(t * 400), lost: 0, repeated: 0, out_of_order: 0, damaged: 0, restarts: 0}, samples: columns(t, t, STEP_S), ...change};
}

/** @param {number} id @param {object} change */
export function alarm(id, change) {
  return {id, condition: 'short_at_brakes', t: 0, severity: 'high', text: '', closure: null, channel: null, active: false, acknowledged: false, by_s: null, burst: id, times: 1, stream: 1, ...change};
}

/** Alarms of the whole outing. */
export const ALARMS = [
  alarm(1, {t: 211.3, text: 'closing 11: downforce short as the brakes came on, 1703 ± 175 N missing', closure: 11}),
  alarm(2, {t: 211.4, condition: 'slow_reattachment', severity: 'medium', text: 'closing 11: slow reattachment, or not whole', closure: 11, burst: 1}),
  alarm(3, {t: 341.4, condition: 'sensor_distrusted', severity: 'low', text: 'sensor distrusted, left out of the estimate: load_rr', channel: 'load_rr', active: true}),
];

export const CAUTIONS = [
  'The results are estimates, with uncertainties, for a competent engineer to weigh; this program is not a safety device, and nothing on a car may depend on it.',
  'The series’ regulations, the circuit’s rules and the team’s responsible engineers decide. A doubt about the structure or the sensors stops the car.',
  'No alarm is no proof: what could not be computed is shown as unknown, and unknown is not fine.',
];

/** How many closings are judged by t. @param {number} t */
export function closingsBy(t) {
  let n = 0;
  while (closureOf(n + 1).time_closed + 1 <= t) n += 1;
  return n;
}

/** What a viewer who joins at t is sent. @param {number} t @param {{fault?: boolean, alarms?: object[]}} [how] */
export function soFar(t, how = {}) {
  const numbers = Array.from({length: closingsBy(t)}, (_, i) => i + 1);
  const alarms = how.alarms ?? ALARMS.filter((a) => a.t <= t && (how.fault || a.condition !== 'sensor_distrusted'));
  return [
    {kind: 'hello', version: '0.1.0', car: 'Lapwing 3', origin: 'tcp://127.0.0.1:5570', live: true, stream: 1, reference: 'ground', limits: {short_share: 0.03, alarm_probability: 0.9, slow_factor: 1.6}, cautions: CAUTIONS, channels: CHANNELS},
    {kind: 'history', step_s: 0.1, columns: columns(0, t, 0.1)},
    {kind: 'closures', list: numbers.map(closureOf)},
    {kind: 'regrowths', list: numbers.map((n) => regrowthOf(n))},
    {kind: 'alarms', list: alarms},
    health(t, how),
    now(t),
  ];
}

/** The end of the outing at t. @param {number} t */
export function end(t) {
  const closures = Array.from({length: closingsBy(t)}, (_, i) => closureOf(i + 1));
  const count = (/** @type {string} */ verdict) => closures.filter((c) => c.verdict === verdict).length;
  const area = (/** @type {number} */ value, /** @type {number} */ sd) => ({value, sd, estimates: 4000});
  const channel = (/** @type {any} */ h) => ({unit: CHANNELS.find((c) => c.name === h.name)?.unit, samples: h.samples, rate: h.rate_hz, gaps: h.gaps, repeats: 0, rejected: {not_finite: 0, out_of_range: 0, gated: h.gated}, health: h.trust, since: h.since, fault: h.fault === 'none' ? null : h.fault});
  return {
    kind: 'end',
    complete: true,
    summary: {
      version: '0.1.0',
      log: 'invented.hfr',
      car: {name: 'Lapwing 3', file: 'car.toml'},
      complete: true,
      incomplete_reason: null,
      duration: t,
      frames: {used: Math.round(t * 400), repeated: 0, out_of_order: 0},
      estimates_rate: 50,
      reference: 'ground',
      air_density: 'measured',
      areas: {flap_closed: {cla_front: area(1.708, 0.103), cla_rear: area(2.543, 0.153), cda: area(1.182, 0.074)}, flap_open: {cla_front: area(1.825, 0.092), cla_rear: area(1.431, 0.073), cda: area(0.899, 0.049)}},
      closures: {total: closures.length, full: count('full'), short: count('short'), unclear: count('unclear'), no_braking: 0, slow: closures.filter((c) => c.slow).length},
      alarms: {short_at_brakes: 2, slow_reattachment: 3},
      channels: Object.fromEntries(health(t, {fault: true}).channels.filter((h) => h.trust !== 'absent').map((h) => [h.name, channel(h)])),
      link: {messages: 1000, lost: 0},
    },
  };
}
