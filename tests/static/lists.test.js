import assert from 'node:assert/strict';
import test from 'node:test';
import { movedBetween } from '../../static/scripts/actions.js';
import { found, joined } from '../../static/scripts/air_list.js';
import { createHistory } from '../../static/scripts/history.js';
import { gainText, parseGain } from '../../static/scripts/part_fields.js';

const rows = joined(
  [{ id: '1', transmitter_id: 't', multiplex_id: 'm', channel: '30', on: true, valid_to: '2027-01-01' }, { id: '2', transmitter_id: 'u', multiplex_id: 'm', channel: '31', on: false }],
  [{ id: 't', name: 'North Hill' }], [{ id: 'm', name: 'Range One' }],
);
const wish = (change) => ({ search: '', filter: 'all', near: new Map(), today: '2026-12-01', ...change });

test('channels are found by any words of mast, multiplex and channel', () => {
  assert.deepEqual(found(rows, wish({ search: 'north 30' })).map((one) => one.id), ['1']);
  assert.deepEqual(found(rows, wish({ search: 'range' })).length, 2);
  assert.deepEqual(found(rows, wish({ search: 'south' })), []);
});

test('channels are filtered by reach, by being left out and by their days', () => {
  assert.deepEqual(found(rows, wish({ filter: 'off' })).map((one) => one.id), ['2']);
  assert.deepEqual(found(rows, wish({ filter: 'near', near: new Map([['2', {}]]) })).map((one) => one.id), ['2']);
  assert.deepEqual(found(rows, wish({ filter: 'dated' })).map((one) => one.id), ['1']);
});

test('steps are taken back one by one, and the same twice is one', () => {
  const past = createHistory(3);
  for (const step of ['a', 'b', 'b', 'c', 'd']) past.push(step);
  assert.deepEqual([past.steps, past.back(), past.back(), past.back()], [2, 'c', 'b', null]);
});

test('a gain table is typed and read back; what is none is none', () => {
  assert.deepEqual(parseGain(gainText([[470, 8.9], [694, 14.4]])), [[470, 8.9], [694, 14.4]]);
  for (const text of ['', '470', '694: 1; 470: 2', '470: x']) assert.equal(parseGain(text), null);
});

test('what a reading moved is told, largest first', () => {
  const answer = (a, b) => ({ verdicts: [{ candidate: 'long' }], multiplexes: [{ id: 'a', name: 'A', chains: { long: { chance: a } } }, { id: 'b', name: 'B', chains: { long: { chance: b } } }] });
  assert.deepEqual(movedBetween(answer(0.5, 0.5), answer(0.6, 0.2)).map((one) => one.name), ['B', 'A']);
  assert.deepEqual(movedBetween(answer(0.5, 0.5), answer(0.51, 0.5)), []);
});
