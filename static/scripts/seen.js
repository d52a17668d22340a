/** What works on this roof today: one tick for each multiplex, taken as readings. */

import { make, part } from './dom.js';
import { NOTHING, titleOf } from './state.js';

const STATES = [['', 'not looked'], ['perfect', 'perfect'], ['breaks up', 'breaks up'], ['not found', 'not found']];

/**
 * @param {HTMLDetailsElement} element
 * @param {{choose: (change: object) => void}} actions
 */
export function createSeen(element, { choose }) {
  const summary = part(element, 'summary .count');
  const words = part(element, '.words');
  const rows = part(element, '.rows');
  let drawn = '';
  /** @type {Record<string, string>} */
  let seen = {};

  rows.addEventListener('change', (event) => {
    const input = /** @type {HTMLInputElement} */ (event.target);
    const next = { ...seen, [input.name.slice(5)]: input.value };
    if (!input.value) delete next[input.name.slice(5)];
    choose({ seen: next });
  });

  /** @param {import('./state.js').State} state */
  function update(state) {
    seen = state.seen;
    const count = Object.keys(seen).length;
    summary.textContent = count ? `${count} said` : 'not said yet';
    const nothing = (state.now || NOTHING) === NOTHING;
    const known = nothing ? [] : (state.answer?.multiplexes ?? []);
    words.textContent = nothing
      ? 'Nothing is up: there is nothing to look at yet.'
      : known.length
        ? `Look at the set on “${titleOf(state, state.now)}”: each tick moves every other prediction of this roof.`
        : 'Place the roof first: its multiplexes are listed here then.';
    const now = JSON.stringify([known.map((one) => [one.id, one.name])]);
    if (now !== drawn) {
      drawn = now;
      rows.replaceChildren(...known.map(line));
    }
    for (const input of rows.querySelectorAll('input')) input.checked = (seen[input.name.slice(5)] ?? '') === input.value;
  }

  /** @param {any} multiplex */
  function line(multiplex) {
    const choices = STATES.map(([value, text]) =>
      make('label', {}, make('input', { type: 'radio', name: `seen-${multiplex.id}`, value }), make('span', { textContent: text })));
    return make('fieldset', {}, make('legend', { textContent: multiplex.name }), make('div', { className: 'choices' }, ...choices));
  }
  return { update };
}
