import assert from 'node:assert/strict';
import test from 'node:test';
import { couldFeed, draftOf, fed, freeId, hasBranches, idsOf, moved, placeOfTrouble, withoutPart, withPart } from '../../static/scripts/chain_edits.js';
import { createHistory } from '../../static/scripts/history.js';
import { CAN_BE_ADDED, fieldsOf, NEW_PARTS, PART_WORDS } from '../../static/scripts/part_fields.js';
import { base64, sent } from '../../static/scripts/sent_file.js';

const part = (kind, id = kind, more = {}) => ({ kind, id, name: id, ...more });
const roof = () => ({ name: 'roof', id: 'r', created: 'x', parts: [part('aerial', 'a', { gain_dbd: [[470, 8], [694, 10]] }), part('feeder', 'f'), part('splitter', 's'), part('outlet', 'o1'), part('outlet', 'o2'), part('receiver', 'set')] });
const kinds = (chain) => chain.parts.map((one) => one.kind).join(' ');
const added = (kind, chain = roof()) => withPart(chain, kind, idsOf([chain]));

test('a draft is a copy without what the store adds', () => {
  const kept = roof();
  const draft = draftOf(kept);
  draft.parts[0].name = 'other';
  assert.equal(kept.parts[0].name, 'a');
  assert.deepEqual(Object.keys(draft), ['name', 'parts']);
});

test('a new part goes where it is of use', () => {
  assert.equal(kinds(added('masthead-amplifier')), 'aerial masthead-amplifier feeder splitter outlet outlet receiver');
  assert.equal(kinds(added('attenuator')), 'aerial feeder attenuator splitter outlet outlet receiver');
  assert.equal(kinds(added('outlet')), 'aerial feeder splitter outlet outlet outlet receiver');
  assert.equal(kinds(added('tap')), 'aerial feeder splitter tap outlet outlet receiver');
  assert.equal(kinds(added('mast')), 'aerial feeder splitter outlet outlet mast receiver');
});

test('ids are free over all chains, so that a new part is never taken for one that is up', () => {
  const other = { name: 'other', parts: [part('feeder', 'feeder-1')] };
  assert.equal(withPart(roof(), 'feeder', idsOf([roof(), other])).parts.at(2).id, 'feeder-2');
  assert.equal(freeId('x', new Set(['x-1', 'x-3'])), 'x-2');
});

test('a second aerial is joined by a combiner, a third goes into it', () => {
  const two = added('aerial');
  assert.equal(kinds(two), 'aerial aerial combiner feeder splitter outlet outlet receiver');
  const three = withPart(two, 'aerial', idsOf([two]));
  assert.equal(kinds(three), 'aerial aerial aerial combiner feeder splitter outlet outlet receiver');
  assert.equal(new Set(three.parts.map((one) => one.id)).size, three.parts.length);
});

test('where it is said what feeds what, a second aerial goes into what is said', () => {
  const said = roof();
  said.parts[1].after = 'a';
  assert.equal(added('aerial', said).parts.find((one) => one.id === 'f').after, 'combiner-1');
  const joined = roof();
  joined.parts.splice(1, 0, part('aerial', 'b'), part('combiner', 'c', { after: ['a', 'b'] }));
  assert.deepEqual(added('aerial', joined).parts.find((one) => one.id === 'c').after, ['a', 'b', 'aerial-1']);
});

test('a copied aerial is not the measured one', () => {
  const measured = roof();
  Object.assign(measured.parts[0], { pattern: 'measured', cuts: [{}], reflection: [[470, 0.1], [694, 0.1]] });
  const { pattern, cuts, reflection } = added('aerial', measured).parts[1];
  assert.deepEqual([pattern, cuts, reflection], ['class', undefined, undefined]);
});

test('taking out the second aerial takes out what joined them', () => {
  assert.equal(kinds(withoutPart(added('aerial'), 1)), kinds(roof()));
  const first = withoutPart(added('aerial'), 0);
  assert.deepEqual([kinds(first), first.parts[0].id], [kinds(roof()), 'aerial-1']);
});

test('what a part fed that is taken out is fed by what fed it', () => {
  const chain = roof();
  chain.parts[1].after = 'a';
  chain.parts[2].after = 'f';
  assert.equal(withoutPart(chain, 1).parts[1].after, 'a');
});

test('what feeds a part is said, one or several, and taken back', () => {
  assert.equal(fed(roof(), 3, ['s']).parts[3].after, 's');
  assert.deepEqual(fed(roof(), 3, ['s', 'f']).parts[3].after, ['s', 'f']);
  const tapped = roof();
  Object.assign(tapped.parts[3], { after: 's', port: 'through' });
  assert.deepEqual([fed(tapped, 3, []).parts[3].after, fed(tapped, 3, []).parts[3].port], [undefined, undefined]);
  assert.equal(hasBranches(roof()), false);
  assert.equal(hasBranches(fed(roof(), 3, ['s'])), true);
});

test('only leads and sets hang on an outlet', () => {
  assert.deepEqual(couldFeed(roof(), roof().parts[3]).map((one) => one.id), ['a', 'f', 's']);
  assert.deepEqual(couldFeed(roof(), part('fly-lead')).map((one) => one.id), ['o1', 'o2']);
});

test('parts are moved by one place', () => {
  assert.equal(kinds(moved(roof(), 2, -1)), 'aerial splitter feeder outlet outlet receiver');
});

test('a refusal points at a chain, a part and a field, or elsewhere', () => {
  const chains = ['kept', { name: 'mine', parts: [] }];
  assert.deepEqual(placeOfTrouble('chains[1].parts[2].length_m', chains), { chain: 'mine', part: 2, key: 'length_m' });
  assert.deepEqual(placeOfTrouble('chains[0].currency', chains), { chain: 'kept', part: null, key: 'currency' });
  for (const field of [null, undefined, 'roof.latitude_deg', 'chains', 'chains[7].name']) assert.equal(placeOfTrouble(field, chains), null);
  assert.equal(placeOfTrouble('chains[0].name', undefined), null);
});

test('every kind that can be added has a name and fields', () => {
  for (const kind of CAN_BE_ADDED) assert.ok(PART_WORDS[kind] && fieldsOf(part(kind)).length, kind);
  assert.deepEqual(Object.keys(NEW_PARTS).filter((kind) => !CAN_BE_ADDED.includes(kind)), []);
});

test('an aerial has more fields where there is more to say', () => {
  const keys = (one, chain) => fieldsOf(one, chain).map(({ key }) => key);
  const two = added('aerial');
  assert.ok(!keys(two.parts[0], two).includes('pointing_deg') && keys(two.parts[1], two).includes('pointing_deg'));
  assert.ok(keys(added('mast').parts[0], added('mast')).includes('wind_area_m2'));
  assert.ok(keys(part('aerial', 'a', { reflection: [[470, 0]] })).includes('gain_includes_mismatch'));
  assert.ok(!keys(part('aerial', 'a', { pattern: 'measured' })).includes('beamwidth_deg'));
});

test('steps that were taken back are taken again, until another is taken', () => {
  const past = createHistory();
  for (const step of ['a', 'b', 'c']) past.push(step);
  assert.deepEqual([past.back(), past.back(), past.undone, past.forward(), past.steps], ['b', 'a', 2, 'b', 1]);
  past.push('b');
  assert.equal(past.undone, 1);
  past.push('d');
  assert.deepEqual([past.undone, past.forward(), past.back()], [0, null, 'b']);
});

test('a file goes out as its bytes, and not where it is missing or too large', async () => {
  assert.equal(base64(new Uint8Array([0, 255, 181])), Buffer.from([0, 255, 181]).toString('base64'));
  const long = new Uint8Array(100_000).fill(7);
  assert.equal(base64(long), Buffer.from(long).toString('base64'));
  const input = (file) => /** @type {any} */ ({ files: file ? [file] : [] });
  await assert.rejects(sent(input(null), 'the sweep'), /Choose the sweep/);
  await assert.rejects(sent(input({ name: 'big.s1p', size: 700_001 }), ''), /big.s1p has 701 kB, the limit here is 700 kB/);
  assert.deepEqual(await sent(input(new File(['µ'], 'a.s1p')), ''), { name: 'a.s1p', base64: 'wrU=' });
});
