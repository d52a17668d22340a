/** A block of flats from a few answers: the proposed chain becomes idea 1, to be edited. */

import { make, part } from './dom.js';
import { chainsHere, verdictOf } from './state.js';
import { asSentence, numberText, parseNumber } from './units.js';

/**
 * @param {HTMLElement} element
 * @param {{block: (answers: any) => Promise<any>}} actions
 */
export function createBlock(element, { block }) {
  const form = part(element, 'form');
  const problem = part(element, '.problem');
  const found = part(element, '.found');
  let picked = ''; // else the aerial of the shown idea
  form.elements.namedItem('aerial').addEventListener('change', () => { picked = value('aerial'); });
  const value = (name) => form.elements.namedItem(name).value;

  form.addEventListener('submit', async (event) => {
    event.preventDefault();
    problem.textContent = '';
    const answers = { outlets: parseNumber(value('outlets')), longest_m: parseNumber(value('longest')), shortest_m: parseNumber(value('shortest')) };
    const wrong = Object.values(answers).some((one) => one === null) || !Number.isInteger(answers.outlets);
    if (wrong) {
      problem.textContent = 'Outlets, longest and shortest run: write numbers, such as 8, 35 and 10.';
      return;
    }
    try {
      tell(await block({ ...answers, layout: value('layout'), aerial: value('aerial') }));
    } catch (error) {
      found.replaceChildren();
      problem.textContent = error.message;
    }
  });

  /** @param {any} made */
  function tell(made) {
    const low = Math.min(...made.outlets.map((one) => one.lowest_dbuv));
    const high = Math.max(...made.outlets.map((one) => one.highest_dbuv));
    const standard = made.standard.toUpperCase().replace('EN-', 'EN ');
    found.replaceChildren(
      make('p', { textContent: `It stands above as idea 1, to be changed and kept. Levels at its outlets: ${numberText(low, 0)} to ${numberText(high, 0)} dB(µV) on channel ${made.channels.join(', ')}.` }),
      make('ul', {}, ...(made.findings.length ? made.findings : [`Every channel lies inside the window of ${standard} at every outlet.`]).map((text) => make('li', { textContent: asSentence(text) }))));
  }

  /** @param {import('./state.js').State} state */
  function update(state) {
    if (element.hidden) return;
    const list = form.elements.namedItem('aerial');
    const aerials = new Map(chainsHere(state).flatMap((one) => one.parts.filter((each) => each.kind === 'aerial').slice(0, 1)).map((one) => [one.id, one.name]));
    const now = JSON.stringify([...aerials]);
    if (list.dataset.pairs !== now) {
      list.dataset.pairs = now;
      list.replaceChildren(...[...aerials].map(([id, textContent]) => make('option', { value: id, textContent })));
    }
    const shown = chainsHere(state).find((one) => one.name === verdictOf(state)?.candidate)?.parts[0].id;
    const wanted = [picked, shown, ...aerials.keys()].find((id) => aerials.has(id));
    if (list.value !== wanted) list.value = wanted;
  }
  return { update };
}
