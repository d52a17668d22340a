import assert from 'node:assert/strict';
import test from 'node:test';
import {
  chainForTheRoof, chainNow, chainsAsked, chainsHere, changes, columns, createStore, decode, encode, initialState, isStale, NOTHING, question, shownCell, titleOf, verdictOf,
} from '../../static/scripts/state.js';
import { sampleAnswer, sampleVerdict } from './sample.js';

const answered = (change = {}) => ({ ...initialState(), answer: sampleAnswer(), now: 'loft', ...change });

test('a link carries everything that was typed, ticked and changed', () => {
  const kept = {
    where: '44.5, -37.2 & #', height: '8', now: 'loft', idea: 'long', cell: { multiplex: 'b', chain: 'long' }, sheet: 'path',
    second: 'short', around: 'trees', seen: { a: 'perfect' }, landmark: 'left of the tower',
    obstacles: [{ bearing_deg: 1, distance_m: 30, height_agl_m: 8, width_m: 10 }],
    edits: [{ name: 'own', parts: [] }], settings: { method: 'p1546' }, assumptions: { reserve_db: 2 },
    pins: [{ name: 'A', where: { latitude_deg: 1, longitude_deg: 2 }, height: 10 }], notes: [],
  };
  assert.deepEqual(decode(`#${encode({ ...initialState(), ...kept })}`), kept);
});

test('a link of an older or unknown version fills in what it holds, and that is said', () => {
  const { where, height, now, seen, edits, notes } = decode('#v=1&at=1%2C2&height=9&now=loft');
  assert.deepEqual({ where, height, now, seen, edits }, { where: '1,2', height: '9', now: 'loft', seen: {}, edits: [] });
  assert.match(notes[0], /older version of Gainworth: what it holds is filled in/);
  assert.match(decode('#v=99&at=1,2&height=7').notes[0], /another version/);
  assert.equal(decode('#v=99&at=1,2&height=7').height, '7');
  assert.equal(decode('#at=1,2').where, '1,2');
});

test('a height in a link is the same height to who reads feet and to who reads metres', () => {
  const at = (units, height) => encode({ ...initialState(), where: '1,2', units, height });
  assert.equal(decode(at('metric', '10'), 'imperial').height, '32.8'); // the international foot is 0.3048 m
  assert.equal(decode(at('imperial', '33'), 'metric').height, '10.1');
  assert.equal(decode(at('imperial', '33'), 'imperial').height, '33');
  assert.equal(decode(at('imperial', '10 m'), 'metric').height, '10');
  assert.equal(decode('#v=2&at=1,2', 'imperial').height, '32.8');
  assert.equal(decode(at('metric', '300'), 'imperial').height, '300 m');
});

test('what a link holds in another shape is left out and named', () => {
  const strange = {
    edits: 'none', seen: { a: 'perfect', b: 'green' }, assumptions: null, second: 7, landmark: 'tower', around: 'moon', later: 1,
    obstacles: [{ bearing_deg: 1 }, { bearing_deg: 1, distance_m: 30, height_agl_m: 8, width_m: 10 }],
  };
  const found = decode(`#v=2&at=1,2&colour=red&sheet=cellar&more=${encodeURIComponent(JSON.stringify(strange))}`);
  const { edits, seen, assumptions, second, landmark, around, obstacles, sheet } = found;
  assert.deepEqual({ edits, seen, assumptions, second, landmark, around, sheet }, { edits: [], seen: { a: 'perfect' }, assumptions: {}, second: null, landmark: 'tower', around: 'mapped', sheet: 'skyline' });
  assert.equal(obstacles.length, 1);
  for (const words of ['“later”', 'edits', 'seen: b', 'assumptions', 'second “7”', 'around “moon”', '1 of obstacles']) assert.ok(found.notes[0].includes(words), words);
  assert.match(found.notes[0], /and 1 more\.$/);
  assert.match(decode('#v=2&more=%7B').notes[0], /cut off/);
});

test('what is no link says nothing', () => {
  for (const text of ['', '#', '#top']) assert.deepEqual(decode(text), {});
});

test('an answer is stale once something else is typed', () => {
  const asked = { where: '1, 2', height: '10' };
  assert.equal(isStale(answered({ asked, where: '1, 2' })), false);
  assert.equal(isStale(answered({ asked, where: '1, 3' })), true);
  assert.equal(isStale(answered({ asked, where: '1, 2', height: 'abc' })), true);
  assert.equal(isStale(initialState()), false);
});

test('where no idea pays, the rigger is told what is up', () => {
  const verdicts = ['long', 'short'].map((candidate) => sampleVerdict({ candidate, answer: 'not worth it' }));
  const answer = { ...sampleAnswer(), verdicts };
  assert.equal(chainForTheRoof(answered({ answer })), 'loft');
  assert.equal(chainForTheRoof(answered({ answer, idea: 'long' })), 'long');
  assert.equal(chainForTheRoof(answered()), 'long');
});

test('listeners hear each change with the state before it', () => {
  const store = createStore(initialState());
  const heard = [];
  store.subscribe((state, before) => heard.push([before.height, state.height]));
  store.set({ height: '12' });
  assert.deepEqual(heard, [['10', '12']]);
});

test('the question names the roof and what is up, nothing if nothing was said', () => {
  const state = { ...initialState(), roof: { latitude_deg: 1, longitude_deg: 2 } };
  assert.deepEqual(question(state, 10), { roof: { latitude_deg: 1, longitude_deg: 2, aerial_agl_m: 10 }, now: NOTHING });
});

test('the chain that is already up is taken as up now', () => {
  assert.equal(chainNow([{ name: 'a' }, { name: 'b', already_up: true }]), 'b');
  assert.equal(chainNow([{ name: 'a' }]), NOTHING);
});

test('without a chosen idea the best verdict is shown', () => {
  const answer = { ...sampleAnswer(), verdicts: [sampleVerdict(), sampleVerdict({ candidate: 'short' })] };
  assert.equal(verdictOf(answered({ answer })).candidate, 'long');
  assert.equal(verdictOf(answered({ answer, idea: 'short' })).candidate, 'short');
  assert.equal(verdictOf(answered({ answer, idea: 'gone' })).candidate, 'long');
});

test('what changes comes first by the size of the change; what does not is apart', () => {
  const { changed, same } = changes(sampleAnswer(), 'loft', 'long');
  assert.deepEqual(changed.map((one) => one.id), ['c', 'b']);
  assert.deepEqual(same.map((one) => one.id), ['a']);
});

test('from nothing, everything that can be had is a change', () => {
  assert.equal(changes(sampleAnswer(), NOTHING, 'long').changed.length, 3);
});

test('a change of the word counts even where the chance hardly moves', () => {
  const answer = sampleAnswer();
  answer.multiplexes[0].chains.loft = { ...answer.multiplexes[0].chains.loft, chance: 0.949, grade: 'likely' };
  assert.ok(changes(answer, 'loft', 'long').changed.some((one) => one.id === 'a'));
});

test('the cell that is shown is the chosen one, else where the idea changes most', () => {
  assert.deepEqual([shownCell(answered()).multiplex.id, shownCell(answered()).chain], ['c', 'long']);
  const chosen = shownCell(answered({ cell: { multiplex: 'b', chain: 'loft' } }));
  assert.deepEqual([chosen.multiplex.id, chosen.chain, chosen.emission.id], ['b', 'loft', 'near-b']);
});

test('a chosen cell of a chain that is no longer compared gives way', () => {
  assert.equal(shownCell(answered({ cell: { multiplex: 'b', chain: 'short' } })).chain, 'long');
});

test('without an answer there is no cell and no verdict', () => {
  assert.equal(shownCell(initialState()), null);
  assert.equal(verdictOf(initialState()), null);
});

test('chains are called by their title', () => {
  assert.equal(titleOf(answered(), 'long'), 'Long aerial');
  assert.equal(titleOf(answered(), NOTHING), 'nothing');
  assert.equal(titleOf(answered(), 'unknown'), 'unknown');
});

test('changed chains stand in the place of kept ones, new ones after them', () => {
  const state = { ...initialState(), chains: [{ name: 'a' }, { name: 'b' }], edits: [{ name: 'b', x: 1 }, { name: 'c' }] };
  assert.deepEqual(chainsAsked(state), ['a', { name: 'b', x: 1 }, { name: 'c' }]);
  assert.deepEqual(chainsHere(state).map((one) => one.name), ['a', 'b', 'c']);
});

test('ticks are asked as readings of what is up, and not where nothing is', () => {
  const state = { ...initialState(), roof: { latitude_deg: 1, longitude_deg: 2 }, now: 'loft', seen: { a: 'breaks up' } };
  assert.deepEqual(question(state, 10).readings, [{ kind: 'seen', multiplex: 'a', state: 'breaks up', chain: 'loft' }]);
  assert.equal(question({ ...state, now: NOTHING }, 10).readings, undefined);
});

test('columns are what is up, the idea, and another where one is chosen', () => {
  const answer = { ...sampleAnswer(), chains: { ...sampleAnswer().chains, short: { title: 'Short aerial' } } };
  assert.deepEqual(columns(answered({ answer })).map((one) => one.role), ['up now', 'idea 1']);
  assert.deepEqual(columns(answered({ answer, second: 'short' })).map((one) => one.name), ['loft', 'long', 'short']);
  assert.deepEqual(columns(answered({ answer, second: 'long' })).length, 2);
});
