/** What an idea costs, line by line: what is bought, what of what is up stays, what comes down. */

import { make, part } from './dom.js';
import { columns, titleOf } from './state.js';
import { moneyText, numberText } from './units.js';

/** @param {HTMLDetailsElement} element */
export function createBill(element) {
  const summary = part(element, 'summary');
  const body = part(element, '.body');
  let drawn = '';

  /** @param {import('./state.js').State} state */
  function update(state) {
    const ideas = columns(state).slice(1);
    const verdicts = ideas.map(({ name }) => state.answer.verdicts.find((one) => one.candidate === name)).filter((one) => one?.bill.length);
    element.hidden = verdicts.length === 0;
    const now = JSON.stringify(verdicts.map((one) => [one.candidate, titleOf(state, one.candidate), one.bill]));
    if (now === drawn) return;
    drawn = now;
    summary.textContent = verdicts.length ? inShort(state, verdicts[0]) : '';
    body.replaceChildren(...verdicts.map((one) => sheet(state, one)));
  }
  return { update };
}

/** @param {import('./state.js').State} state @param {any} verdict */
function inShort(state, verdict) {
  const { currency } = state.answer.chains[verdict.candidate];
  const { bought, kept } = sorted(verdict.bill);
  const price = verdict.price_difference === null ? 'Price not known' : moneyText(verdict.price_difference, currency);
  const stays = kept.length ? `, ${kept.length} stay` : '';
  return `${price}, line by line: ${bought.length} to buy${stays}`;
}

function sheet(state, verdict) {
  const { currency } = state.answer.chains[verdict.candidate];
  const { paid, kept, down } = sorted(verdict.bill);
  const digits = verdict.bill.some((line) => !Number.isInteger(line.pays ?? 0)) ? 2 : 0; // so that the lines add up as written
  const money = (value) => (value === null ? 'not known' : `${numberText(value, digits)}\u00a0${currency}`);
  const words = (line) => [line.name, line.detail].filter(Boolean).join(', ');
  const rows = paid.map((line) => make('tr', {},
    make('th', { scope: 'row' }, line.what === 'baseline' ? `less ${line.name}, bought instead` : words(line), ...(line.note ? [make('span', { className: 'note', textContent: line.note })] : [])),
    make('td', { className: 'number', textContent: money(line.pays) })));
  const list = (title, lines) => (lines.length ? [make('p', {}, make('b', { textContent: `${title}: ` }), `${lines.map(words).join('; ')}.`)] : []);
  return make('div', { className: 'of-idea' },
    make('table', {},
      make('caption', { textContent: titleOf(state, verdict.candidate) }),
      make('thead', {}, make('tr', {}, make('th', { scope: 'col', textContent: 'To be paid' }), make('th', { scope: 'col', className: 'number', textContent: 'Price' }))),
      make('tbody', {}, ...rows),
      make('tfoot', {}, make('tr', {}, make('th', { scope: 'row', textContent: 'Together' }), make('td', { className: 'number', textContent: money(verdict.price_difference) })))),
    ...(verdict.price_difference === null ? [make('p', { textContent: 'Fill in every price under Chains to have the sum, and a verdict.' })] : []),
    ...list('Stays up, not paid again', kept), ...list('Comes down', down));
}

/** @param {any[]} bill */
function sorted(bill) {
  const things = bill.filter((line) => line.kind !== 'receiver' || line.price); // a set stands there already
  return {
    bought: things.filter((line) => line.what === 'part' && line.state === 'bought'),
    paid: things.filter((line) => ['bought', 'set off'].includes(line.state) && (line.what === 'part' || line.pays !== 0)),
    kept: things.filter((line) => line.what === 'part' && line.state === 'kept'),
    down: things.filter((line) => line.state === 'taken down'),
  };
}
