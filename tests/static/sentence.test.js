import assert from 'node:assert/strict';
import test from 'node:test';
import { plain, sentence } from '../../static/scripts/sentence.js';
import { sampleAnswer, sampleVerdict } from './sample.js';

const told = (change, currency = 'EUR') => {
  const answer = sampleAnswer();
  answer.chains.long.currency = currency;
  return plain(sentence(answer, sampleVerdict(change))).replaceAll('\u00a0', ' ');
};

for (const [name, change, words] of [
  ['worth it, with the price it may have', {}, 'Today 1 to 2 of 3. Long aerial adds about 2 for 90 EUR: worth it, up to 104 EUR.'],
  ['not worth it, with the price that would turn it', { answer: 'not worth it', expected_extra: 0.4, break_even_price: 20 },
    'Today 1 to 2 of 3. Long aerial adds less than 1 for 90 EUR: not worth it, unless it costs less than 20 EUR.'],
  ['nothing gained in all, though a row changes', { answer: 'not worth it', expected_extra: 0, break_even_price: 0 },
    'Today 1 to 2 of 3. Long aerial adds next to nothing for 90 EUR: not worth it.'],
  ['something lost and money saved', { answer: 'worth it', expected_extra: -0.3, price_difference: -40, break_even_price: -15 },
    'Today 1 to 2 of 3. Long aerial loses less than 1 on balance and saves 40 EUR: worth it.'],
  ['no price', { answer: null, price_difference: null },
    'Today 1 to 2 of 3. Long aerial adds about 2; its price is not known, worth it up to 104 EUR.'],
  ['no price and nothing gained in all', { answer: null, price_difference: null, expected_extra: 0, break_even_price: 0 },
    'Today 1 to 2 of 3. Long aerial adds next to nothing; its price is not known, not worth it at any price.'],
  ['free of charge', { price_difference: 0 }, 'Today 1 to 2 of 3. Long aerial adds about 2 at no cost: worth it, up to 104 EUR.'],
  ['nothing up today', { baseline: 'nothing', expected_extra: 2.5 },
    'Nothing is up today. Long aerial brings 2 to 3 of 3 for 90 EUR: worth it, up to 104 EUR.'],
  ['measure first', { answer: 'measure first' }, 'Today 1 to 2 of 3. Long aerial adds about 2 for 90 EUR: measure first.'],
]) {
  test(`the sentence tells: ${name}`, () => assert.equal(told(change), words));
}

test('without a currency the price stands alone', () => {
  assert.match(told({}, ''), /for 90: worth it, up to 104\.$/);
});

test('the answer word stands out', () => {
  const pieces = sentence(sampleAnswer(), sampleVerdict());
  assert.deepEqual(pieces.filter((one) => one.weight === 'answer').map((one) => one.text), ['worth it']);
});

test('one chain alone asks for a second', () => {
  assert.match(plain(sentence(sampleAnswer(), null)), /second chain/);
});

test('nothing in reach is said as such', () => {
  assert.match(plain(sentence({ ...sampleAnswer(), multiplexes: [] }, null)), /Nothing .* within reach/);
});
