/** What can go wrong on the roof, and with this answer. */

/** @param {HTMLElement} element */
export function createCautions(element) {
  const before = /** @type {HTMLElement} */ (element.querySelector('.always'));
  const list = /** @type {HTMLElement} */ (element.querySelector('ul'));

  /** @param {import('./state.js').State} state */
  function update(state) {
    const cautions = state.answer?.cautions ?? [];
    before.hidden = cautions.length > 0;
    list.replaceChildren(...cautions.map((text) => Object.assign(document.createElement('li'), { textContent: text })));
  }
  return { update };
}
