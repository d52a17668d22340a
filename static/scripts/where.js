/** What is asked first: where, how high, what stands around, what is up, which ideas. */

import { button, refill } from './dom.js';
import { columns, noneIsWorthIt, NOTHING, titleOf, chainsHere } from './state.js';

const AROUND = [['mapped', 'as mapped'], ['open', 'open ground'], ['suburban', 'houses'], ['urban', 'town houses'], ['trees', 'trees']];

/**
 * @param {HTMLFormElement} element
 * @param {{type: (change: object) => void, submit: () => void, choose: (change: object) => void, place: (place: import('./state.js').Place) => void}} actions
 */
export function createWhere(element, { type, submit, choose, place: move }) {
  const named = (name) => /** @type {any} */ (element.elements.namedItem(name));
  const [place, height, around, now, idea, second] = ['place', 'height', 'around', 'now', 'idea', 'second'].map(named);
  const unit = /** @type {HTMLElement} */ (element.querySelector('.field-height .hint'));

  element.addEventListener('submit', (event) => {
    event.preventDefault();
    submit();
  });
  place.addEventListener('input', () => type({ where: place.value }));
  height.addEventListener('input', () => type({ height: height.value }));
  for (const one of [place, height]) one.addEventListener('change', submit);
  around.addEventListener('change', () => choose({ around: around.value }));
  now.addEventListener('change', () => choose({ now: now.value }));
  idea.addEventListener('change', () => choose({ idea: idea.value || null }));
  second.addEventListener('change', () => choose({ second: second.value || null }));
  options(around, AROUND, 'mapped');
  const doubt = /** @type {HTMLElement} */ (element.querySelector('.doubt'));

  /** @param {import('./state.js').State} state */
  function update(state) {
    fill(place, state.where);
    fill(height, state.height);
    unit.textContent = state.units === 'imperial' ? 'ft above ground' : 'm above ground';
    around.value = state.around;
    const titled = chainsHere(state).map((chain) => [chain.name, titleOf(state, chain.name)]);
    options(now, [[NOTHING, 'nothing yet'], ...titled], state.now);
    const answers = new Map((state.answer?.verdicts ?? []).map((one) => [one.candidate, one.answer]));
    const judged = titled
      .filter(([name]) => name !== state.now)
      .map(([name, title]) => [name, answers.get(name) ? `${title}: ${answers.get(name)}` : title]);
    const best = state.answer?.verdicts[0];
    options(idea, [['', best ? `${noneIsWorthIt(state.answer) ? 'nearest' : 'best'}: ${titleOf(state, best.candidate)}` : 'the best'], ...judged], state.idea ?? '');
    const first = columns(state)[1]?.name;
    options(second, [['', 'none'], ...judged.filter(([name]) => name !== first)], state.second ?? '');
    problem(place, state.trouble, 'where', 'latitude_deg', 'longitude_deg');
    problem(height, state.trouble, 'height', 'aerial_agl_m');
    const { doubt: asked } = state;
    refill(doubt, ...(asked ? [capital(asked.question), ' ', button('Swap them', () => move(asked.swapped), { 'data-key': 'swap' })] : []));
  }
  return { update };
}

/** @param {string} text */
const capital = (text) => text.charAt(0).toUpperCase() + text.slice(1);

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
  if (select.selectedIndex < 0) select.selectedIndex = 0;
}

/** @param {HTMLInputElement} field @param {import('./state.js').State['trouble']} trouble @param {string[]} names */
function problem(field, trouble, ...names) {
  const mine = trouble?.field && names.includes(trouble.field.split('.').at(-1) ?? '');
  field.toggleAttribute('aria-invalid', Boolean(mine));
  if (mine) field.setAttribute('aria-invalid', 'true');
  const words = document.getElementById(`${field.id}-problem`);
  if (words) words.textContent = mine ? trouble.message : '';
}
