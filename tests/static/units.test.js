import assert from 'node:assert/strict';
import test from 'node:test';
import {
  asSentence, bearingText, chanceText, compassBearing, countText, distanceText, heightIn, heightText, moneyText, numberText, parseHeight, parseLength, parseNumber, parsePlace, placeText, plainText, rodsText, signedText, told,
} from '../../static/scripts/units.js';

test('a chance is told in tenths, and never as certain or impossible', () => {
  assert.deepEqual([0.9, 0.72, 0.5, 0.3, 0.1].map(chanceText), ['9 in 10', '7 in 10', '5 in 10', '3 in 10', '1 in 10']);
  assert.equal(chanceText(1), '99 in 100');
  assert.equal(chanceText(0), '1 in 100');
});

test('a sentence begins with a capital, a file with its own name', () => {
  assert.equal(asSentence('is binary'), 'Is binary.');
  assert.equal(asSentence('sweep.s1p: line 1: no data.'), 'sweep.s1p: line 1: no data.');
});

test('19 in 20 begins where a chance is called secure', () => {
  assert.equal(chanceText(0.95), '19 in 20');
  assert.equal(chanceText(0.9499), '9 in 10');
});

test('a larger chance is never told as a smaller one', () => {
  const value = (text) => Number(text.split(' ')[0]) / Number(text.split(' ')[2]);
  const told = Array.from({ length: 1001 }, (_, step) => value(chanceText(step / 1000)));
  assert.ok(told.every((one, place) => place === 0 || one >= told[place - 1]));
});

test('counts say how sure they are', () => {
  assert.deepEqual([0, 0.4, 1, 2.2, 2.5, 6.9].map(countText), ['none', 'less than 1', 'about 1', 'about 2', '2 to 3', 'about 7']);
});

test('numbers have a true minus and no negative zero', () => {
  assert.equal(numberText(-3.14, 1), '\u22123.1');
  assert.equal(numberText(-0.01, 1), '0.0');
  assert.equal(signedText(2), '+2.0');
  assert.equal(signedText(-2), '\u22122.0');
});

test('money stands with its currency only if there is one', () => {
  assert.equal(moneyText(90.4, ''), '90');
  assert.equal(moneyText(90.4, 'EUR'), '90\u00a0EUR');
});

test('bearings are three figures from 000 to 359', () => {
  assert.deepEqual([8, 118.4, 359.7, -1].map(bearingText), ['008°', '118°', '000°', '359°']);
});

test('short distances have a decimal', () => {
  assert.deepEqual([1.24, 9.96, 52.3].map(distanceText), ['1.2\u00a0km', '10.0\u00a0km', '52\u00a0km']);
});

test('polarisation is told by how the rods lie', () => {
  assert.deepEqual(['horizontal', 'vertical', 'mixed'].map(rodsText), ['rods flat', 'rods upright', 'rods either way']);
});

for (const [text, latitude, longitude] of [
  ['44.5, -37.25', 44.5, -37.25], ['44.5 -37.25', 44.5, -37.25], ['44.5N 37.25W', 44.5, -37.25], ['12.5 S, 7 E', -12.5, 7],
  ['44.5° N, 37.25° W', 44.5, -37.25], ['\u221212, +7.5', -12, 7.5], ['12,5; -7,25', 12.5, -7.25], [' 1,2 ', 1, 2],
]) {
  test(`the position “${text}” is read`, () => {
    assert.deepEqual(parsePlace(text), { place: { latitude_deg: latitude, longitude_deg: longitude } });
  });
}

for (const [text, words] of [
  ['', /empty/], ['somewhere', /“somewhere” is not a position: write/], ['44.5', /not a position/], ['91, 0', /Latitude 91.*90/],
  ['0, 181', /Longitude 181.*180/], ['NaN, 3', /not a position/], ['1e3, 2', /not a position/], ['44.5, -37.2, 8', /not a position/],
]) {
  test(`the position “${text}” is refused with what to write`, () => {
    assert.match(parsePlace(text).problem, words);
  });
}

test('a position can be typed as it is shown', () => {
  const place = { latitude_deg: -44.12345, longitude_deg: 7.5 };
  assert.deepEqual(parsePlace(placeText(place)), { place });
});

test('a height is metres, with or without the unit', () => {
  assert.deepEqual(['10', ' 8.5 m', '8,5'].map(parseHeight), [{ height: 10 }, { height: 8.5 }, { height: 8.5 }]);
});

test('what is no height says what came, what is allowed and how to write it', () => {
  for (const text of ['ten', '1e2', '10 miles', '-3', '1.000,5']) {
    assert.equal(parseHeight(text).problem, `“${text}” is not a height: write it in metres above the ground, 1 to 200, such as 10.`);
  }
  assert.match(parseHeight(' ').problem, /empty: write it in metres/);
  assert.match(parseHeight('5000').problem, /“5000” is not possible: .* 1 to 200/);
  assert.match(parseHeight('0,5').problem, /“0,5” is not possible/);
  assert.match(parseHeight('abc', 'imperial').problem, /in feet above the ground, 3.3 to 656, such as 33/);
});

test('lengths are read in the reader’s units', () => {
  assert.equal(parseLength('10', 'imperial'), 3.05); // 1 ft = 0.3048 m, to a centimetre
  assert.equal(parseLength('10 m', 'imperial'), 10);
  assert.equal(parseLength('12,5', 'metric'), 12.5);
  for (const text of ['', '-1', 'x', '1,250']) assert.equal(parseLength(text, 'metric'), null);
});

test('a number is typed back as it is shown', () => {
  assert.deepEqual([10, 12.5, 3.048, 0].map((one) => plainText(one, 2)), ['10', '12.5', '3.05', '0']);
});

test('feet and miles by their exact lengths', () => {
  assert.equal(heightText(3.048, 'imperial'), '10\u00a0ft'); // 1 ft = 0.3048 m
  assert.equal(distanceText(16.09344, 'imperial'), '10\u00a0mi'); // 1 mile = 1.609344 km
  assert.deepEqual(parseHeight('33', 'imperial'), { height: 10.06 });
  assert.deepEqual(parseHeight('33 ft'), { height: 10.06 });
  assert.deepEqual(parseHeight('10 m', 'imperial'), { height: 10 });
  assert.equal(heightIn(3.048, 'imperial').toFixed(6), '10.000000');
});

test('a sentence of the server is told in the reader’s units, other figures untouched', () => {
  const words = '61 km, blocked: the ground at 5.1 km stands 26 m into the line, 49 dB(µV/m), 39 N/km.';
  assert.equal(told(words, 'imperial'), '38\u00a0mi, blocked: the ground at 3.2\u00a0mi stands 85\u00a0ft into the line, 49\u00a0dB(µV/m), 39 N/km.');
  assert.match(told(words), /^61\u00a0km, blocked: the ground at 5\.1\u00a0km stands 26\u00a0m/);
});

test('numbers are read with point or comma, and what is none is none', () => {
  assert.deepEqual(['52', '52,5', '\u22123', 'x', ''].map(parseNumber), [52, 52.5, -3, null, null]);
});

test('a mark that may part thousands is not taken for a decimal one', () => {
  const read = (text, decimal) => parseNumber(text, decimal);
  assert.deepEqual(['1,250', '1.250', '0,125', '1,25', '1234,567', '1,234.5'].map((text) => read(text, '.')), [null, 1.25, 0.125, 1.25, 1234.567, null]);
  assert.deepEqual(['1,250', '1.250', '52.5'].map((text) => read(text, ',')), [1.25, null, 52.5]);
});

test('west of true north, a compass reads more', () => {
  assert.equal(compassBearing(59, { declination_deg: -11.5 }), 70.5);
  assert.equal(compassBearing(59, null), 59);
});
