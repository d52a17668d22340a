/** The multiplexes that an idea changes, number first; the others folded away. */

import { make, mark, part } from './dom.js';
import { cellOf, changes, columns, hasMoved, LEAST_CHANGE, shownCell, stepOf, titleOf, verdictOf } from './state.js';
import { bearingText, chanceText, dayText } from './units.js';

const LIMITS = { time: 'bad nights' }; // the others are called what they are
const DRAWN = 300; // rows beyond these wait behind a button

/**
 * @param {HTMLElement} element
 * @param {{choose: (change: object) => void}} actions
 */
export function createChanges(element, { choose }) {
  const head = part(element, 'thead tr');
  const body = part(element, 'tbody');
  const table = part(element, 'table');
  const empty = part(element, '.empty');
  const folded = part(element, 'details');
  const summary = part(element, 'summary');
  const list = part(element, 'details ul');
  let drawn = '';

  element.addEventListener('click', (event) => {
    const button = /** @type {HTMLElement} */ (event.target).closest('button');
    if (button) choose({ cell: { multiplex: button.dataset.multiplex, chain: button.dataset.name } });
  });

  /** @param {import('./state.js').State} state */
  function update(state) {
    const shown = columns(state);
    element.hidden = shown.length === 0;
    if (shown.length === 0) return;
    const cell = shownCell(state);
    const now = JSON.stringify([shown, cell?.multiplex.id, cell?.chain]);
    if (now === drawn && update.of === state.answer) return;
    drawn = now;
    update.of = state.answer;
    const names = shown.map((one) => one.name);
    const { changed, same } = changes(state.answer, names[0], ...names.slice(1));
    const focused = document.activeElement?.closest('button')?.dataset;
    head.replaceChildren(
      make('th', { scope: 'col' }, 'Multiplex'),
      ...shown.map(({ role, name }) => make('th', { scope: 'col' },
        make('span', { className: 'role', textContent: role }), ' ', make('span', { className: 'chain', textContent: titleOf(state, name) }))),
    );
    table.classList.toggle('wide', shown.length > 2);
    body.replaceChildren(...changed.slice(0, DRAWN).map((multiplex) => line(state, multiplex, names, cell)));
    table.hidden = changed.length === 0;
    empty.hidden = changed.length > 0;
    empty.textContent = Math.abs(verdictOf(state)?.expected_extra ?? 0) < LEAST_CHANGE
      ? 'Nothing changes: they bring the same.'
      : 'No multiplex by itself changes by as much as 1 in 20; what is told above is all of them together.';
    folded.hidden = same.length === 0;
    summary.textContent = `${same.length} unchanged`;
    list.replaceChildren(...same.slice(0, DRAWN).map((multiplex) => make('li', {},
      make('span', { className: 'name', textContent: multiplex.name }), ...cells(multiplex, names.slice(1, 2), cell).filter((one) => one.tagName === 'BUTTON'))));
    if (focused?.multiplex) refocus(focused);
  }
  update.of = null;

  function line(state, multiplex, names, cell) {
    const head = make('th', { scope: 'row' },
      make('span', { className: 'name', textContent: multiplex.name }),
      make('span', { className: 'from', textContent: origin(state, multiplex, names[1]) }));
    return make('tr', {}, head, ...cells(multiplex, names, cell).map((one) => make('td', {}, one)));
  }

  function cells(multiplex, names, shown) {
    return names.map((name) => {
      const cell = cellOf(multiplex, name);
      if (!cell) return make('span', { className: 'nothing', textContent: 'no aerial' });
      const chosen = shown?.multiplex.id === multiplex.id && shown.chain === name;
      const button = make('button', { type: 'button', className: 'cell', 'aria-pressed': chosen }, chance(cell, aside(multiplex, names[0], name)));
      Object.assign(button.dataset, { multiplex: multiplex.id, name });
      return button;
    });
  }

  /** The rows were made anew: the focus stays where it was. */
  /** @param {any} was */
  function refocus({ multiplex, name }) {
    const buttons = [...element.querySelectorAll('button')];
    buttons.find((one) => one.dataset.multiplex === multiplex && one.dataset.name === name)?.focus();
  }
  return { update };
}

/** Which way a chance has moved whose words are those of today. @param {any} multiplex @param {string} now @param {string} name */
function aside(multiplex, now, name) {
  const [before, after] = [cellOf(multiplex, now), cellOf(multiplex, name)];
  if (!before || before.grade !== after.grade || chanceText(before.chance) !== chanceText(after.chance) || !hasMoved(multiplex, now, name)) return '';
  return stepOf(multiplex, now, name) > 0 ? 'a little better' : 'a little worse';
}

/** @param {any} cell @param {string} [more] @returns {HTMLElement} number first, then the word with its mark */
export function chance(cell, more = '') {
  const limit = ['open', 'doubtful'].includes(cell.grade) ? cell.held_back_by?.limit : null;
  return make('span', { className: 'chance' },
    make('span', { className: 'figure', textContent: chanceText(cell.chance) }),
    make('span', { className: 'grade' }, mark(cell.grade), make('span', { className: 'word', textContent: cell.grade })),
    make('span', { className: 'held', textContent: [more, limit ? `held back by ${LIMITS[limit] ?? limit}` : ''].filter(Boolean).join(', ') }));
}

/** @param {import('./state.js').State} state @param {any} multiplex @param {string} chain */
function origin(state, multiplex, chain) {
  const emission = state.answer.emissions.find((one) => one.id === cellOf(multiplex, chain)?.emission);
  if (!emission) return '';
  const channel = emission.channel ? `channel ${emission.channel}` : `${emission.frequency_mhz} MHz`;
  const closes = emission.valid_to ? `, closes on ${dayText(emission.valid_to)}` : '';
  return `${channel} from ${emission.transmitter_name}, ${bearingText(emission.bearing_deg)}${closes}`;
}
