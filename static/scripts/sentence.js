/** The answer as one sentence, from the numbers of the document. Pure: no page, no network. */

import { bearingText, countText, moneyText } from './units.js';
import { hasMoved, LEAST_CHANGE, noneIsWorthIt, NOTHING, stepOf } from './state.js';

/**
 * @typedef {{text: string, weight?: 'strong'|'answer'}} Piece a stretch of the sentence and how it stands out
 * @param {any} answer document
 * @param {any} verdict one of its verdicts
 * @param {boolean} [asked] whether the user chose this idea: else it is said where none pays
 * @returns {Piece[]}
 */
export function sentence(answer, verdict, asked = false) {
  const total = answer.multiplexes.length;
  if (total === 0) return [{ text: 'Nothing is on the air within reach of this roof.' }];
  if (!verdict) return [{ text: 'Keep a second chain to compare it with what is up now.' }];
  const currency = answer.chains[verdict.candidate]?.currency;
  const title = answer.chains[verdict.candidate]?.title ?? verdict.candidate;
  const idea = [...change(answer, verdict, total), ...price(verdict, currency)];
  if (!asked && noneIsWorthIt(answer)) {
    return [
      ...today(answer, verdict, total),
      { text: `None of the ${answer.verdicts.length} ideas is worth it`, weight: 'answer' },
      { text: `. What comes nearest, ${title},` }, ...idea, { text: `${below(verdict, currency)}.` },
    ];
  }
  return [
    ...today(answer, verdict, total),
    { text: title }, ...idea,
    ...judgement(verdict, currency, toRead(answer, verdict.measure_next)),
    { text: '.' },
  ];
}

/** @param {Piece[]} pieces @returns {string} */
export function plain(pieces) {
  return pieces.map((piece) => piece.text).join('');
}

/** @returns {Piece[]} */
function today(answer, verdict, total) {
  if (verdict.baseline === NOTHING) return [{ text: 'Nothing is up today. ' }];
  const count = countText(answer.chains[verdict.baseline].expected_count);
  return [{ text: 'Today ' }, { text: count, weight: 'strong' }, { text: ` of ${total}. ` }];
}

/** What it changes in all, said so that it fits the table of what changes. @returns {Piece[]} */
function change(answer, verdict, total) {
  const { expected_extra: extra, baseline, candidate } = verdict;
  const bare = baseline === NOTHING;
  const steps = answer.multiplexes.filter((one) => hasMoved(one, baseline, candidate)).map((one) => stepOf(one, baseline, candidate));
  const [up, down] = [steps.some((one) => one > 0), steps.some((one) => one < 0)];
  if (Math.abs(extra) < LEAST_CHANGE) {
    if (up && down) return [{ text: ' gains and loses ' }, { text: 'alike', weight: 'strong' }];
    return [{ text: ' adds ' }, { text: steps.length ? 'next to nothing' : 'nothing', weight: 'strong' }];
  }
  const against = extra < 0 ? up : down;
  return [
    { text: extra < 0 ? ' loses ' : bare ? ' brings ' : ' adds ' },
    { text: countText(Math.abs(extra)), weight: 'strong' },
    { text: `${bare && extra > 0 ? ` of ${total}` : ''}${against ? ' on balance' : ''}` },
  ];
}

/** What it might cost to pay, where it does not. */
function below(verdict, currency) {
  return verdict.break_even_price >= 1 ? `, and would pay below ${moneyText(verdict.break_even_price, currency)}` : ', and would not pay at any price';
}

/** @returns {Piece[]} */
function price(verdict, currency) {
  const difference = verdict.price_difference;
  if (difference === null) return [{ text: '; its price is not known' }];
  if (Math.round(difference) === 0) return [{ text: ' at no cost' }];
  if (difference < 0) return [{ text: ' and saves ' }, { text: moneyText(-difference, currency), weight: 'strong' }];
  return [{ text: ' for ' }, { text: moneyText(difference, currency), weight: 'strong' }];
}

/** @returns {Piece[]} */
function judgement(verdict, currency, reading) {
  const limit = moneyText(Math.max(0, verdict.break_even_price), currency);
  const some = verdict.break_even_price >= 1;
  if (verdict.answer === null) {
    return some
      ? [{ text: ', ' }, { text: 'worth it', weight: 'answer' }, { text: ` up to ${limit}` }]
      : [{ text: ', ' }, { text: 'not worth it', weight: 'answer' }, { text: ' at any price' }];
  }
  const word = /** @type {Piece[]} */ ([{ text: ': ' }, { text: verdict.answer, weight: 'answer' }]);
  if (verdict.answer === 'measure first' && reading) return [...word, { text: ` ${reading}` }];
  if (verdict.answer === 'worth it' && some) return [...word, { text: `, up to ${limit}` }];
  if (verdict.answer === 'not worth it' && some) return [...word, { text: `, unless it costs less than ${limit}` }];
  return word;
}

/** What to read first, in words. @param {any} answer @param {any} next */
function toRead(answer, next) {
  const emission = answer.emissions.find((one) => one.id === next?.emission);
  if (!emission) return '';
  return `the level of ${emission.channel ? `channel ${emission.channel}` : `${emission.frequency_mhz} MHz`} at ${bearingText(next.bearing_deg)}`;
}
