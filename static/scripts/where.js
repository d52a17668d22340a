/** The four things that are asked: where, how high, what is up, which idea. */

import { NOTHING, titleOf } from './state.js';

/**
 * @param {HTMLFormElement} element
 * @param {{type: (change: object) => void, submit: () => void, choose: (change: object) => void}} actions
 */
export function createWhere(element, { type, submit, choose }) {
  const place = /** @type {HTMLInputElement} */ (element.elements.namedItem('place'));
  const height = /** @type {HTMLInputElement} */ (element.elements.namedItem('height'));
  const now = /** @type {HTMLSelectElement} */ (element.elements.namedItem('now'));
  const idea = /** @type {HTMLSelectElement} */ (element.elements.namedItem('idea'));

  element.addEventListener('submit', (event) => {
    event.preventDefault();
    submit();
  });
  place.addEventListener('input', () => type({ where: place.value }));
  height.addEventListener('input', () => type({ height: height.value }));
  for (const field of [place, height]) field.addEventListener('change', submit);
  now.addEventListener('change', () => choose({ now: now.value }));
  idea.addEventListener('change', () => choose({ idea: idea.value || null }));

  /** @param {import('./state.js').State} state */
  function update(state) {
    fill(place, state.where);
    fill(height, state.height);
    const names = (state.chains ?? []).map((chain) => chain.name);
    const titled = names.map((name) => [name, titleOf(state, name)]);
    options(now, [[NOTHING, 'nothing yet'], ...titled], state.now);
    const answers = new Map((state.answer?.verdicts ?? []).map((one) => [one.candidate, one.answer]));
    const best = state.answer?.verdicts[0];
    options(
      idea,
      [
        ['', best ? `best: ${titleOf(state, best.candidate)}` : 'the best there is'],
        ...titled.filter(([name]) => name !== state.now).map(([name, title]) => [name, answers.get(name) ? `${title}: ${answers.get(name)}` : title]),
      ],
      state.idea ?? '',
    );
    problem(place, state.trouble, 'where', 'latitude_deg', 'longitude_deg');
    problem(height, state.trouble, 'height', 'aerial_agl_m');
  }
  return { update };
}

/** @param {HTMLInputElement} field @param {string} text */
function fill(field, text) {
  if (field.value !== text) field.value = text;
}

/** @param {HTMLSelectElement} select @param {string[][]} pairs @param {string} chosen */
function options(select, pairs, chosen) {
  const wanted = JSON.stringify(pairs);
  if (select.dataset.pairs !== wanted) {
    select.dataset.pairs = wanted;
    select.replaceChildren(...pairs.map(([value, text]) => Object.assign(document.createElement('option'), { value, textContent: text })));
  }
  select.value = chosen;
}

/** @param {HTMLInputElement} field @param {import('./state.js').State['trouble']} trouble @param {string[]} names */
function problem(field, trouble, ...names) {
  const mine = trouble?.field && names.includes(trouble.field.split('.').at(-1) ?? '');
  field.toggleAttribute('aria-invalid', Boolean(mine));
  if (mine) field.setAttribute('aria-invalid', 'true');
  const words = document.getElementById(`${field.id}-problem`);
  if (words) words.textContent = mine ? trouble.message : '';
}
