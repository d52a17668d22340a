/** The sentence, its reason, and whatever went wrong. */

import { sentence } from './sentence.js';
import { isStale, titleOf, verdictOf } from './state.js';
import { heightText, moneyText } from './units.js';

/**
 * @param {HTMLElement} element
 * @param {{visit: (roof: any) => void, back: () => void}} actions
 */
export function createDecision(element, { visit, back }) {
  const told = /** @type {HTMLElement} */ (element.querySelector('.sentence'));
  const reason = /** @type {HTMLElement} */ (element.querySelector('.reason'));
  const terms = /** @type {HTMLElement} */ (element.querySelector('.terms'));
  const trouble = /** @type {HTMLElement} */ (element.querySelector('.trouble'));
  const notes = /** @type {HTMLElement} */ (element.querySelector('.notes'));
  const old = /** @type {HTMLElement} */ (element.querySelector('.old'));
  const demo = /** @type {HTMLElement} */ (element.querySelector('.demo'));
  const roofs = /** @type {HTMLElement} */ (element.querySelector('.demo ul'));
  const undo = /** @type {HTMLElement} */ (element.querySelector('.back'));
  let shown = '';
  undo.addEventListener('click', back);

  /** @param {import('./state.js').State} state */
  function update(state) {
    const verdict = verdictOf(state);
    const pieces = state.answer ? sentence(state.answer, verdict, state.idea !== null) : [{ text: invitation(state) }];
    const now = JSON.stringify(pieces);
    if (now !== shown) {
      // Only a changed sentence is read out.
      shown = now;
      told.replaceChildren(...pieces.map((piece) => {
        const node = document.createElement(piece.weight ? 'strong' : 'span');
        node.textContent = piece.text;
        if (piece.weight) node.className = piece.weight;
        return node;
      }));
    }
    element.classList.toggle('asking', state.asking);
    element.classList.toggle('empty', !state.answer);
    element.setAttribute('aria-busy', String(state.asking));
    reason.textContent = verdict?.reason ?? (state.answer || state.asking ? '' : 'The answer compares what is up now with every chain that is kept, and says which of them is worth its price here.');
    terms.textContent = verdict ? counted(state, verdict) : '';
    const text = state.trouble?.message ?? '';
    if (trouble.textContent !== text) trouble.textContent = text;
    undo.hidden = state.past === 0;
    const stale = isStale(state) && !state.asking;
    document.documentElement.dataset.stale = stale ? 'yes' : 'no'; // every panel of the answer is drawn as an old one
    old.textContent = stale && state.trouble ? `Not an answer to what is typed now. It is still the one for ${state.asked?.where}, ${inWords(state)}:` : '';
    if (notes.textContent !== state.notes.join(' ')) notes.textContent = state.notes.join(' ');
    offer(state);
  }

  /** The roofs of the demo, for whoever has none yet. */
  function offer(state) {
    const known = state.health?.demo_roofs ?? [];
    demo.hidden = known.length === 0 || state.answer !== null || state.asking;
    if (demo.hidden || roofs.children.length === known.length) return;
    roofs.replaceChildren(...known.map((roof) => {
      const item = document.createElement('li');
      const button = Object.assign(document.createElement('button'), { type: 'button', textContent: roof.name });
      button.addEventListener('click', () => visit(roof));
      item.append(button, Object.assign(document.createElement('span'), { textContent: roof.shows }));
      return item;
    }));
  }
  return { update };
}

/** @param {import('./state.js').State} state */
function inWords(state) {
  const { aerial_agl_m } = state.answer.roof;
  return `aerial at ${heightText(aerial_agl_m, state.units, Number.isInteger(aerial_agl_m) ? 0 : 1)}`;
}

/** @param {import('./state.js').State} state */
function invitation(state) {
  if (state.asking) return 'Looking along every path to this roof …';
  if (state.chains?.length === 0) return 'No chain is kept yet: import one, then place the roof.';
  return 'Where is the roof? Type its position above, or click it on the map.';
}

/** @param {import('./state.js').State} state @param {any} verdict */
function counted(state, verdict) {
  const currency = state.answer.chains[verdict.candidate]?.currency;
  const worth = state.answer.assumptions.find((one) => one.id === 'worth_per_multiplex')?.value;
  const lines = [];
  if (worth !== undefined) lines.push(`One more multiplex is counted as worth ${moneyText(worth, currency)}.`);
  const equal = verdict.cheapest_equal;
  if (equal) lines.push(equal === verdict.baseline ? 'What is up now brings the same.' : `${titleOf(state, equal)} brings the same for less.`);
  return lines.join(' ');
}
