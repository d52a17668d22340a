/** The cheapest chains for this roof, from the cheapest up: what each dearer one brings, and whether that pays. */

import { button, make, part } from './dom.js';
import { countText, moneyText, parseNumber } from './units.js';

/**
 * @param {HTMLElement} element
 * @param {{cheapest: (wish: any) => Promise<any>, take: (chain: any) => Promise<void>}} actions
 */
export function createCheapest(element, { cheapest, take }) {
  const form = part(element, 'form');
  const problem = part(element, '.problem');
  const found = part(element, '.found');
  /** The answer that the list was made with. @type {any} */
  let of = null;

  form.addEventListener('submit', async (event) => {
    event.preventDefault();
    problem.textContent = '';
    const wish = Object.fromEntries(['outlets', 'feeder_m', 'labour_price', 'visit_price'].map((key) => [key, parseNumber(form.elements.namedItem(key).value)]));
    if (Object.values(wish).some((one) => one === null) || !Number.isInteger(wish.outlets)) {
      problem.textContent = 'Outlets, feeder, labour and visit: write numbers, such as 2, 15, 20 and 15; 0 where nothing is asked.';
      return;
    }
    try {
      tell(await cheapest(wish));
    } catch (error) {
      found.replaceChildren();
      problem.textContent = error.message;
    }
  });

  /** @param {any} document */
  function tell(document) {
    const { front, currency, multiplexes, worth_per_multiplex: worth } = document;
    const steps = front.map((step, place) => make('li', {},
      make('p', {}, make('b', { textContent: moneyText(step.price, currency) }), ` ${countText(step.expected_count)} of ${multiplexes}: ${step.chain.title}`),
      make('p', { className: 'why', textContent: `${step.reason} ${paying(step, place, currency, worth)}` }),
      button('Take it as idea 1', () => take(step.chain).catch((error) => { problem.textContent = error.message; }), { 'aria-label': `Take ${step.chain.title} as idea 1` })));
    const left = document.left_out.length ? ` Left out for want of a price: ${document.left_out.join(', ')}.` : '';
    found.replaceChildren(
      make('p', { textContent: `${document.tried} chains were tried; these bring more than every cheaper one. Prices are of a chain bought whole: taken as idea 1, what is up already is not paid again.${left}` }),
      make('ol', {}, ...steps));
  }

  /** @param {import('./state.js').State} state */
  function update(state) {
    if (state.answer?.roof === of || !state.answer) return;
    const { latitude_deg, longitude_deg, aerial_agl_m } = state.answer.roof;
    const moved = of && (of.latitude_deg !== latitude_deg || of.longitude_deg !== longitude_deg || of.aerial_agl_m !== aerial_agl_m);
    of = state.answer.roof;
    if (moved) found.replaceChildren(); // it was found for another roof
  }
  return { update };
}

/** @param {any} step @param {number} place @param {string} currency @param {number} worth */
function paying(step, place, currency, worth) {
  const each = moneyText(step.price_per_extra ?? 0, currency);
  if (step.price_per_extra === null) return '';
  const start = place ? '' : `That is ${each} each: `;
  const verb = step.pays ? 'pays' : 'does not pay';
  return `${start}${start ? 'it' : 'It'} ${verb}, one more counting as worth ${moneyText(worth, currency)}.`;
}
