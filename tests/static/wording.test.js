import assert from 'node:assert/strict';
import { readFileSync } from 'node:fs';
import test from 'node:test';
import { plain, sentence } from '../../static/scripts/sentence.js';
import { changes, NOTHING } from '../../static/scripts/state.js';
import { chanceText, countText } from '../../static/scripts/units.js';

const wording = JSON.parse(readFileSync(new URL('wording.json', import.meta.url), 'utf8'));
// design.md: the grades begin at these chances
const grade = (chance) => (chance >= 0.95 ? 'secure' : chance >= 0.7 ? 'likely' : chance >= 0.3 ? 'open' : 'doubtful');

/** An answer whose multiplexes have these chances now and with the idea. */
function answerOf(pairs, change = {}) {
  const cell = (chance) => ({ chance, grade: grade(chance), emission: 'e' });
  const bare = pairs[0][0] === null;
  const chains = { idea: { title: 'Idea', currency: 'EUR', expected_count: pairs.reduce((sum, one) => sum + one[1], 0) } };
  if (!bare) chains.now = { title: 'Now', currency: 'EUR', expected_count: pairs.reduce((sum, one) => sum + one[0], 0) };
  const verdict = {
    baseline: bare ? NOTHING : 'now', candidate: 'idea', answer: 'worth it', price_difference: 50, break_even_price: 60, measure_next: null,
    expected_extra: pairs.reduce((sum, [before, after]) => sum + after - (before ?? 0), 0), ...change,
  };
  return {
    multiplexes: pairs.map(([before, after], place) => ({ id: `m${place}`, chains: { idea: cell(after), ...(bare ? {} : { now: cell(before) }) } })),
    emissions: [], chains, verdicts: [verdict],
  };
}

test('chances and counts are told as on the command line', () => {
  for (const [chance, words] of wording.chances) assert.equal(chanceText(chance), words, `${chance}`);
  for (const [count, words] of wording.counts) assert.equal(countText(count), words, `${count}`);
});

test('the change is told as on the command line', () => {
  for (const { pairs, words } of wording.changes) {
    const answer = answerOf(pairs);
    assert.ok(plain(sentence(answer, answer.verdicts[0])).includes(`Idea ${words}`), `${plain(sentence(answer, answer.verdicts[0]))} has not: ${words}`);
  }
});

test('a chance told in a fraction never contradicts its grade', () => {
  for (let step = 0; step <= 10000; step += 1) {
    const chance = step / 10000;
    const [top, bottom] = chanceText(chance).split(' in ').map(Number);
    assert.equal(grade(top / bottom), grade(chance), `${chance}: ${chanceText(chance)}`);
    assert.ok(Math.abs(top / bottom - chance) <= 0.0501);
  }
});

test('sentence and table agree, whatever an idea does to two multiplexes', () => {
  const levels = [0, 0.04, 0.2, 0.29, 0.31, 0.5, 0.54, 0.69, 0.71, 0.94, 0.96, 1];
  for (const a of levels) for (const b of levels) for (const c of levels) for (const d of levels) {
    const answer = answerOf([[a, b], [c, d]]);
    const words = plain(sentence(answer, answer.verdicts[0]));
    const { changed } = changes(answer, 'now', 'idea');
    const told = `${[a, b, c, d]}: ${words}`;
    if (/ adds nothing/.test(words)) assert.equal(changed.length, 0, told);
    if (/next to nothing|alike|on balance/.test(words)) assert.ok(changed.length > 0, told);
    if (/ (adds|loses) (about|\d)/.test(words)) assert.ok(changed.length > 0, told);
    if (/ loses /.test(words) && !/alike|on balance/.test(words)) assert.ok(changed.every((one) => one.chains.idea.chance <= one.chains.now.chance), told);
    if (/ adds (less|about|\d)/.test(words) && !/on balance/.test(words)) assert.ok(changed.every((one) => one.chains.idea.chance >= one.chains.now.chance), told);
  }
});

test('price, limit and answer never contradict one another', () => {
  for (const price of [null, -40, -0.3, 0, 0.4, 42.6, 43.4, 43.6]) for (const limit of [-20, 0, 0.4, 0.6, 1, 43.2, 43.5, 44.4]) for (const reading of [false, true]) {
    const verdict = { price_difference: price, break_even_price: limit, answer: price === null ? null : reading ? 'measure first' : limit > price ? 'worth it' : 'not worth it' };
    const words = plain(sentence(answerOf([[0.1, 0.9]], verdict), answerOf([[0.1, 0.9]], verdict).verdicts[0]));
    assert.ok(!/-|\u2212|NaN|null|undefined/.test(words), words);
    const cost = / for (\d+)/.exec(words)?.[1];
    const upTo = /up to (\d+)/.exec(words)?.[1];
    const under = /less than (\d+)\u00a0EUR\./.exec(words)?.[1];
    if (cost && upTo && verdict.answer === 'worth it') assert.ok(Number(cost) <= Number(upTo), words);
    if (cost && under) assert.ok(Number(under) <= Number(cost), words);
  }
});

test('where none of several ideas pays, that is the headline, and a chosen idea has its own', () => {
  const answer = answerOf([[0.5, 0.9]], { answer: 'not worth it', price_difference: 74, break_even_price: 20 });
  answer.verdicts.push({ ...answer.verdicts[0], candidate: 'other' });
  const told = (asked) => plain(sentence(answer, answer.verdicts[0], asked)).replaceAll('\u00a0', ' ');
  assert.equal(told(false), 'Today less than 1 of 1. None of the 2 ideas is worth it. What comes nearest, Idea, adds less than 1 for 74 EUR, and would pay below 20 EUR.');
  assert.equal(told(true), 'Today less than 1 of 1. Idea adds less than 1 for 74 EUR: not worth it, unless it costs less than 20 EUR.');
  answer.verdicts[1].answer = 'worth it';
  assert.doesNotMatch(told(false), /None of/);
});
