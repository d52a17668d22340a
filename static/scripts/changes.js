/** The multiplexes that the idea changes; the others folded away. */

import { cellOf, changes, shownCell, titleOf, verdictOf } from './state.js';
import { bearingText, chanceText } from './units.js';

/**
 * @param {HTMLElement} element
 * @param {{choose: (change: object) => void}} actions
 */
export function createChanges(element, { choose }) {
  const body = /** @type {HTMLElement} */ (element.querySelector('tbody'));
  const table = /** @type {HTMLElement} */ (element.querySelector('table'));
  const empty = /** @type {HTMLElement} */ (element.querySelector('.empty'));
  const folded = /** @type {HTMLElement} */ (element.querySelector('details'));
  const summary = /** @type {HTMLElement} */ (element.querySelector('summary'));
  const list = /** @type {HTMLElement} */ (element.querySelector('details ul'));
  const row = /** @type {HTMLTemplateElement} */ (document.getElementById('change-row'));

  element.addEventListener('click', (event) => {
    const button = /** @type {HTMLElement} */ (event.target).closest('button');
    if (button) choose({ cell: { multiplex: button.dataset.multiplex, chain: button.dataset.name } });
  });

  /** @param {import('./state.js').State} state */
  function update(state) {
    const verdict = verdictOf(state);
    element.hidden = !verdict;
    if (!verdict) return;
    const names = { now: verdict.baseline, idea: verdict.candidate };
    for (const title of element.querySelectorAll('thead .chain')) {
      title.textContent = titleOf(state, names[title.dataset.chain]);
    }
    const { changed, same } = changes(state.answer, names.now, names.idea);
    const focused = document.activeElement?.closest('button')?.dataset;
    body.replaceChildren(...changed.map((multiplex) => filled(state, multiplex, names)));
    table.hidden = changed.length === 0;
    empty.hidden = changed.length > 0;
    folded.hidden = same.length === 0;
    summary.textContent = `${same.length} unchanged`;
    list.replaceChildren(...same.map((multiplex) => unchanged(state, multiplex, names.idea)));
    if (focused?.multiplex) refocus(focused);
  }

  function filled(state, multiplex, names) {
    const line = /** @type {HTMLElement} */ (row.content.cloneNode(true));
    line.querySelector('.name').textContent = multiplex.name;
    line.querySelector('.from').textContent = origin(state, multiplex, names.idea);
    for (const cell of line.querySelectorAll('.cell')) fillCell(state, cell, multiplex, names[cell.dataset.chain]);
    return line;
  }

  function fillCell(state, button, multiplex, chain) {
    const cell = cellOf(multiplex, chain);
    if (!cell) {
      button.replaceWith(Object.assign(document.createElement('span'), { className: 'nothing', textContent: 'no aerial' }));
      return;
    }
    const shown = shownCell(state);
    const chosen = shown?.multiplex.id === multiplex.id && shown.chain === chain;
    button.dataset.multiplex = multiplex.id;
    button.dataset.name = chain;
    button.setAttribute('aria-pressed', String(chosen));
    button.append(chance(cell));
  }

  function unchanged(state, multiplex, chain) {
    const item = document.createElement('li');
    const name = Object.assign(document.createElement('span'), { className: 'name', textContent: multiplex.name });
    const cell = cellOf(multiplex, chain);
    if (!cell) {
      item.append(name);
      return item;
    }
    const button = Object.assign(document.createElement('button'), { type: 'button', className: 'cell' });
    fillCell(state, button, multiplex, chain);
    item.append(name, button);
    return item;
  }

  /** The rows were made anew: the focus stays where it was. */
  function refocus({ multiplex, name }) {
    const buttons = [...element.querySelectorAll('button')];
    buttons.find((one) => one.dataset.multiplex === multiplex && one.dataset.name === name)?.focus();
  }
  return { update };
}

/** @param {any} cell @returns {DocumentFragment} number first, then the word with its mark */
function chance(cell) {
  const template = /** @type {HTMLTemplateElement} */ (document.getElementById('chance'));
  const made = /** @type {DocumentFragment} */ (template.content.cloneNode(true));
  made.querySelector('.figure').textContent = chanceText(cell.chance);
  made.querySelector('use').setAttribute('href', `#mark-${cell.grade}`);
  made.querySelector('.word').textContent = cell.grade;
  const limit = ['open', 'doubtful'].includes(cell.grade) ? cell.held_back_by?.limit : null;
  made.querySelector('.held').textContent = limit ? `held back by ${limit}` : '';
  return made;
}

/** @param {import('./state.js').State} state @param {any} multiplex @param {string} chain */
function origin(state, multiplex, chain) {
  const emission = state.answer.emissions.find((one) => one.id === cellOf(multiplex, chain)?.emission);
  if (!emission) return '';
  const channel = emission.channel ? `channel ${emission.channel}` : `${emission.frequency_mhz} MHz`;
  return `${channel} from ${emission.transmitter_name}, ${bearingText(emission.bearing_deg)}`;
}
