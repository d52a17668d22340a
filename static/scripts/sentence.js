/** The answer as one sentence, from the numbers of the document. Pure: no page, no network. */

import { bearingText, countText, moneyText } from './units.js';
import { NOTHING } from './state.js';

const NO_CHANGE = 0.05; // multiplexes; less is nothing to a person

/**
 * @typedef {{text: string, weight?: 'strong'|'answer'}} Piece a stretch of the sentence and how it stands out
 * @param {any} answer document
 * @param {any} verdict one of its verdicts
 * @returns {Piece[]}
 */
export function sentence(answer, verdict) {
  const total = answer.multiplexes.length;
  if (total === 0) return [{ text: 'Nothing is on the air within reach of this roof.' }];
  if (!verdict) return [{ text: 'Keep a second chain to compare it with what is up now.' }];
  const currency = answer.chains[verdict.candidate]?.currency;
  return [
    ...today(answer, verdict, total),
    ...change(verdict, total, answer.chains[verdict.candidate]?.title ?? verdict.candidate),
    ...price(verdict, currency),
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

/** @returns {Piece[]} */
function change(verdict, total, title) {
  const extra = verdict.expected_extra;
  const name = title;
  if (Math.abs(extra) < NO_CHANGE) return [{ text: `${name} adds ` }, { text: 'nothing', weight: 'strong' }];
  if (extra < 0) return [{ text: `${name} loses ` }, { text: countText(-extra), weight: 'strong' }];
  if (verdict.baseline === NOTHING) {
    return [{ text: `${name} brings ` }, { text: countText(extra), weight: 'strong' }, { text: ` of ${total}` }];
  }
  return [{ text: `${name} adds ` }, { text: countText(extra), weight: 'strong' }];
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
  return `${emission.channel ? `channel ${emission.channel}` : `${emission.frequency_mhz} MHz`} at ${bearingText(next.bearing_deg)}`;
}
