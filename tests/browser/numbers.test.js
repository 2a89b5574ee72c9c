// SPDX-License-Identifier: MIT
// What the page reckons, without a browser.
import {test} from 'node:test';
import assert from 'node:assert/strict';
import {fixed, plusMinus, quantityText, speedText, clock, span, age} from '../../estimator/wall/page/units.js';
import {Outing} from '../../estimator/wall/page/outing.js';
import {Series, COLUMN_NAMES} from '../../estimator/wall/page/series.js';
import {usualBand, usualMargin, usualOf, usualWords, timesUsual, studentTenth} from '../../estimator/wall/page/usual.js';
import {ticks, linePath, bandPath} from '../../estimator/wall/page/svg.js';
import {valueAt, reaches, finer, finerValues} from '../../estimator/wall/page/curve.js';
import {railOrder, burstLed} from '../../estimator/wall/page/alarm_part.js';
import {threeSentences} from '../../estimator/wall/page/sentences.js';
import {weightedMean, areasBySpeed} from '../../estimator/wall/page/area_table.js';
import {balance} from '../../estimator/wall/page/now_part.js';
import {flowAnswer, paceAnswer} from '../../estimator/wall/page/words.js';
import {closureOf, regrowthOf, soFar, columns, alarm} from './support/invented_outing.js';

const SI = {speed: 'm/s', force: 'N', area: 'm²'};
const US = {speed: 'mph', force: 'lbf', area: 'ft²'};

/** @param {number} t */
function outingAt(t) {
  const outing = new Outing();
  for (const message of soFar(t)) outing.apply(/** @type {any} */ (message));
  return outing;
}

test('numbers are rounded to two figures of their uncertainty', () => {
  assert.equal(plusMinus(1703.408, 174.8, 3), '1703\u00a0±\u00a0175');
  assert.equal(plusMinus(0.05386, 0.0177, 3), '0.054\u00a0±\u00a00.018');
  assert.equal(plusMinus(-0.3704, 0.083, 3), '−0.370\u00a0±\u00a00.083');
  assert.equal(fixed(-0.0001, 2), '0.00', 'no minus before nothing');
  assert.equal(fixed(1234567, 0), '1\u2009234\u2009567');
});

test('units: factors are those of their definitions', () => {
  assert.equal(quantityText([4448.2216152605, 44.482216152605], US, 'force'), '1000\u00a0±\u00a010 lbf');
  assert.equal(speedText(44.704, US), '100 mph');
  assert.equal(quantityText([0.09290304 * 10, 0.0929], US, 'area'), '10.0\u00a0±\u00a01.0 ft²');
  assert.equal(quantityText([1703, 175], {...SI, force: 'kN'}, 'force'), '1.70\u00a0±\u00a00.18 kN');
});

test('times', () => {
  assert.equal(clock(163.64), '2:43.6');
  assert.equal(clock(59.96), '1:00.0', 'rounding carries into the minute');
  assert.equal(clock(3725.5, 0), '1:02:06');
  assert.equal(clock(NaN), '–:––');
  assert.equal(span(0.0777), '78 ms');
  assert.equal(age(0.04), '0.0 s');
  assert.equal(age(75), '75 s');
});

test('history grows by 10 Hz rows, the newest minutes keep every row, and nothing comes twice', () => {
  const series = new Series();
  series.addHistory(columns(0, 10, 0.1));
  series.addSamples(columns(9, 12, 0.02));
  assert.equal(series.first, 0);
  assert.ok(Math.abs(series.newest - 11.98) < 1e-9);
  assert.equal(series.history.count, 120);
  assert.equal(series.recent.count, 104, 'rows after 9.9 s only');
  assert.ok(series.history.time.subarray(1, 120).every((t, i) => t > series.history.time[i]));
  const [t, speed] = series.window(2, 4, ['speed'], 1000);
  assert.ok(t[0] !== null && t[0] <= 2 && Number(t[t.length - 1]) >= 4);
  assert.ok(Math.abs(Number(speed[5]) - columns(Number(t[5]), Number(t[5]) + 0.05, 0.1).speed[0]) < 1e-4);
});

test('the ring forgets the oldest rows and a window of them stays in order', () => {
  const series = new Series();
  const wrap = series.recent.capacity + 500;
  const t = Array.from({length: wrap}, (_, i) => i * 0.02);
  series.addSamples({t, speed: t.map((x) => x * 2)});
  assert.equal(series.recent.count, series.recent.capacity);
  assert.ok(Math.abs(series.recent.timeAt(0) - 500 * 0.02) < 1e-9);
  const [times, speed] = series.window(series.newest - 60, series.newest, ['speed'], 1000);
  assert.ok(times.length <= 1001 && times.length > 400);
  assert.ok(times.every((at, i) => i === 0 || Number(at) > Number(times[i - 1])));
  times.forEach((at, i) => assert.ok(Math.abs(Number(speed[i]) - 2 * Number(at)) < 1e-3));
  assert.equal(series.latest('cda'), null, 'what never came is not known');
});

test('history outgrows its first room', () => {
  const series = new Series();
  const n = series.history.capacity + 10;
  const t = Array.from({length: n}, (_, i) => i * 0.1);
  series.addHistory({t, speed: t});
  assert.equal(series.history.count, n);
  assert.equal(series.history.columns.speed[n - 1], Math.fround(t[n - 1]));
  assert.equal(Object.keys(series.history.columns).length, COLUMN_NAMES.length);
});

test('usual: the zone’s own mean with the spread of all zones, every zone’s where that is not known, else nothing', () => {
  const of = (/** @type {[number, number][]} */ ...pairs) => pairs.map(([zone, value]) => ({zone, value}));
  assert.equal(usualOf(of([1, 4], [2, 6]), 1), null);
  const car = usualOf(of([1, 4], [2, 6], [4, 8]), 1);
  assert.deepEqual([car?.of, car?.middle, car?.count], ['car', 6, 3]);
  assert.ok(Math.abs(Number(car?.sd) - 2 / Math.sqrt(3)) < 1e-12);
  // Within zones: 3 ± 1 twice, 7 ± 2 twice; squares 2 + 8 on two degrees of freedom.
  const zone = usualOf(of([1, 2], [1, 4], [2, 5], [2, 9]), 2);
  assert.deepEqual([zone?.of, zone?.middle, zone?.count], ['zone', 7, 2]);
  assert.ok(Math.abs(Number(zone?.sd) - Math.sqrt(5 / 2)) < 1e-12);
  assert.ok(Math.abs(Number(zone?.half) - studentTenth(2) * Math.sqrt(5 * 1.5)) < 1e-12);
  assert.equal(usualOf(of([1, 2], [1, 4], [2, 5], [2, 9]), 3)?.of, 'car', 'a zone that was never seen');
  // Tables of Student's t, one-sided 0.10 (memory).
  for (const [freedom, t] of [[2, 1.886], [3, 1.638], [5, 1.476], [10, 1.372], [1e9, 1.2816]]) assert.ok(Math.abs(studentTenth(freedom) - t) < 0.008, `t of ${freedom}`);
});

test('the usual band is made of the closings before that came back whole and were not slow', () => {
  const outing = outingAt(360);
  const chord_time = regrowthOf(17).chord_time;
  const none = usualBand(outing, 2, 3, chord_time);
  assert.deepEqual([none.count, none.share.length], [2, 0]);
  assert.equal(usualWords(none), 'usual not known yet (2 of 3 closings)');
  assert.equal(usualWords(usualBand(outing, 2, 4, chord_time)), 'usual in all zones (3 earlier)');
  const band = usualBand(outing, 2, 17, chord_time); // 2, 5, 8; 11 and 14 were slow
  assert.equal(usualWords(band), 'usual here (3 earlier)');
  const half = band.share.indexOf(0.5);
  const chords = [2, 5, 8].map((n) => reaches(regrowthOf(n).t, regrowthOf(n).share, 0.5) / regrowthOf(n).chord_time);
  assert.ok(Math.abs(band.middle[half] - (chord_time * (chords[0] + chords[1] + chords[2])) / 3) < 1e-9);
  band.share.forEach((_, i) => assert.ok(band.early[i] < band.middle[i] && band.middle[i] < band.late[i]));
  const margin = usualMargin(outing, 2, 17);
  const mean = [2, 5, 8].map((n) => /** @type {any} */ (closureOf(n)).margin[0]).reduce((a, b) => a + b) / 3;
  assert.ok(Math.abs(Number(margin?.middle) - mean) < 1e-9);
  assert.equal(margin?.count, band.count, 'Zones and Regrowth call the same closings usual');
  assert.equal(usualMargin(outing, 2, 4), null, 'other zones’ brakes say nothing of this one’s margin');
});

test('times usual, in chords', () => {
  const outing = outingAt(360);
  const of = (/** @type {number} */ n) => timesUsual(outing, /** @type {any} */ (outing.closures.get(n)), n);
  assert.equal(of(3), null);
  assert.equal(of(4)?.of, 'car');
  const slow = of(11);
  assert.equal(slow?.of, 'zone');
  const usual = Math.exp([2, 5, 8].reduce((sum, n) => sum + Math.log(Number(closureOf(n).chords)), 0) / 3);
  assert.ok(Math.abs(Number(slow?.factor) - Number(closureOf(11).chords) / usual) < 1e-9);
  assert.ok(Number(slow?.sd) > 0);
  assert.equal(of(14), null, 'a flow that settles short of whole has no such time');
});

test('a curve goes through its points, and between two of them never beyond either', () => {
  const x = [0, 1, 2, 3, 4];
  const y = [0, 0, 0.7, 0.95, 1];
  const [fine, values] = [finer(x, 8), finerValues(x, y, 8)];
  assert.equal(fine.length, 33);
  x.forEach((_, i) => assert.ok(Math.abs(values[8 * i] - y[i]) < 1e-12));
  values.forEach((v, k) => assert.ok(k === 0 || v >= values[k - 1] - 1e-12, 'it only rises'));
  assert.ok(Math.abs(valueAt(x, y, reaches(x, y, 0.5)) - 0.5) < 1e-6);
  assert.equal(valueAt(x, y, 3), 0.95);
  assert.ok(Number.isNaN(valueAt(x, y, 4.5)) && Number.isNaN(reaches(x, y, 2)));
});

test('ticks and paths', () => {
  assert.deepEqual(ticks(-0.2, 0.5, 8), [-0.2, -0.1, 0, 0.1, 0.2, 0.3, 0.4, 0.5]);
  assert.deepEqual(ticks(0, 10, 3), [0, 5, 10]);
  assert.equal(linePath([0, 1, 2, 3], [0, NaN, 2, 3]), 'M0.0 0.0M2.0 2.0L3.0 3.0');
  assert.equal(bandPath([0], [0], [1]), '');
});

test('rail: severity first, then the newest burst; the first of a burst knows how many it leads', () => {
  const alarms = [alarm(4, {severity: 'low'}), alarm(2, {severity: 'medium', burst: 1}), alarm(3, {severity: 'high'}), alarm(1, {severity: 'high'})];
  assert.deepEqual(railOrder(/** @type {any} */ (alarms)).map((a) => a.id), [3, 1, 2, 4]);
  assert.equal(burstLed(/** @type {any} */ (alarms[3]), /** @type {any} */ (alarms)), 1);
  assert.equal(burstLed(/** @type {any} */ (alarms[1]), /** @type {any} */ (alarms)), 0);
});

test('answers in words, unknown never read as fine', () => {
  const outing = outingAt(360);
  const of = (/** @type {number} */ n) => /** @type {any} */ (closureOf(n));
  assert.deepEqual(flowAnswer(of(11), SI), {mark: 'short', word: 'Short at the brakes', detail: '1703\u00a0±\u00a0175 N missing; 370\u00a0±\u00a083 ms too late'});
  assert.equal(flowAnswer({...of(1), verdict: null, t95: null, tau: null}, SI).mark, 'unknown');
  assert.equal(flowAnswer({...of(1), shortfall: null, margin: null, verdict: 'unclear'}, SI).detail, 'missing downforce unknown');
  assert.equal(paceAnswer(outing, of(1)).word, 'Not known yet');
  assert.equal(paceAnswer(outing, of(14)).word, 'Settles at 49 %');
  assert.match(paceAnswer(outing, of(11)).word, /^Slow: \d\.\d × usual$/);
  assert.equal(paceAnswer(outing, {...of(5), t95: null}).word, 'Unknown');
});

test('three sentences are made from the numbers', () => {
  const sentences = threeSentences(outingAt(360), SI);
  assert.equal(sentences[0], '18 closings in 3 zones: 15 full, 2 short, 1 unclear.');
  assert.match(sentences[1], /^Closing 11 \(lap 4, zone 2\) was the slowest, \d\.\d\s±\s0\.\d times that zone’s usual; 3 closings flagged slow in all \(11, 13, 14\)\. 1 closing \(14\) settled short of whole, the lowest at 49 % of the flap’s downforce\.$/);
  assert.equal(sentences[2], 'The most missing as the brakes came on was 2621\u00a0±\u00a090 N, 21.8 % of the rear downforce: closing 14, lap 5, zone 2, judged short.');
  assert.deepEqual(threeSentences(new Outing(), SI), ['The flap did not close in this outing.']);
  assert.match(threeSentences(outingAt(60), SI)[1], /^None was slow by what is usual for such flaps; too few/);
});

test('areas by speed: weighted by inverse variance, steady flow only', () => {
  const mean = weightedMean([[1, 0.1], [2, 0.2], [NaN, 1], [9, 0]]);
  assert.ok(mean && Math.abs(mean[0] - 1.2) < 1e-9);
  assert.ok(mean && Math.abs(mean[1] - Math.sqrt(Math.max(2 / 125, (0.04 * 100 + 0.64 * 25) / 125))) < 1e-9);
  assert.equal(weightedMean([]), null);
  const rows = areasBySpeed(outingAt(360).series);
  assert.ok(rows.some((r) => r.flap === 'open') && rows.some((r) => r.flap === 'shut'));
  for (const row of rows) {
    const rear = /** @type {[number, number]} */ (row.areas[1]);
    assert.ok(Math.abs(rear[0] - (row.flap === 'open' ? 1.4 : 2.55)) < 0.08, `${row.flap} ${row.from}: ${rear[0]}`);
  }
});

test('balance carries both axles’ uncertainty', () => {
  const b = balance([4000, 40], [6000, 80]);
  assert.ok(b && Math.abs(b[0] - 0.4) < 1e-12);
  assert.ok(b && Math.abs(b[1] - Math.hypot(6000 * 40, 4000 * 80) / 1e8) < 1e-12);
  assert.equal(balance([4000, 40], null), null);
  assert.equal(balance([-5, 1], [2, 1]), null);
});

test('a greeting begins the outing anew, and kinds of a newer program are left alone', () => {
  const outing = outingAt(360);
  outing.apply({kind: 'weather on the moon'});
  assert.equal(outing.closures.size, 18);
  outing.apply(/** @type {any} */ (soFar(10)[0]));
  assert.equal(outing.closures.size, 0);
  assert.ok(Number.isNaN(outing.series.newest));
});
