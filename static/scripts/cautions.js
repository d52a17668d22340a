/** What can go wrong on the roof, and with this answer. */

import { titleOf } from './state.js';

/** @param {HTMLElement} element */
export function createCautions(element) {
  const before = /** @type {HTMLElement} */ (element.querySelector('.always'));
  const list = /** @type {HTMLElement} */ (element.querySelector('ul'));

  /** @param {import('./state.js').State} state */
  function update(state) {
    const cautions = state.answer?.cautions ?? [];
    before.hidden = cautions.length > 0;
    list.replaceChildren(...cautions.map((text) => Object.assign(document.createElement('li'), { textContent: called(state, text) })));
  }
  return { update };
}

/** A caution about a chain, with what people call it in place of its name. @param {import('./state.js').State} state @param {string} text */
function called(state, text) {
  const name = Object.keys(state.answer.chains).find((one) => text.startsWith(`${one}: `));
  return name ? titleOf(state, name) + text.slice(name.length) : text;
}
