/** Roofs kept under names: open, compare, report; a link; the page as one file. */

import { button, make, part, refill } from './dom.js';
import { placeText } from './units.js';

/**
 * @param {HTMLElement} element
 * @param {{keep: (name: string, over: boolean) => Promise<any>, open: (roof: any) => void, compare: (roof: any) => void, forget: (id: string) => void, link: () => Promise<boolean>, file: () => void}} actions
 */
export function createRoofs(element, { keep, open, compare, forget, link, file }) {
  const form = part(element, 'form');
  const name = part(element, '[name=roof-name]');
  const problem = part(element, '.problem');
  const list = part(element, '.list');
  const said = part(element, '.said');
  form.addEventListener('submit', (event) => {
    event.preventDefault();
    void save(false);
  });
  part(element, '.link').addEventListener('click', async () => {
    said.textContent = (await link()) ? 'The link is copied: whoever opens it here sees the same.' : 'The link stands in the address bar: copy it there.';
  });
  part(element, '.file').addEventListener('click', () => { file(); said.textContent = 'Saved as one file: it opens without a signal and without Gainworth.'; });
  part(element, '.print').addEventListener('click', () => window.print());

  /** @param {boolean} over what another window kept meanwhile */
  async function save(over) {
    if (!name.value.trim()) return void (problem.textContent = 'Write a name first, such as the street and number.');
    problem.replaceChildren();
    try {
      const done = await keep(name.value.trim(), over);
      if (done === 'changed elsewhere') {
        problem.replaceChildren('This roof was changed in another window since it was opened here. ', button('Keep mine', () => void save(true)));
      } else {
        said.textContent = `Kept as “${done.name}”.`;
      }
    } catch (error) {
      problem.textContent = error.message;
    }
  }

  /** @param {import('./state.js').State} state */
  function update(state) {
    if (element.hidden) return;
    form.hidden = !state.answer;
    part(element, '.why').hidden = !state.answer || state.kept.length > 0;
    part(element, '.with-answer').hidden = !state.answer;
    part(element, '.empty').hidden = Boolean(state.answer) || state.kept.length > 0;
    const mine = state.kept.find((one) => one.id === state.saved?.id);
    if (update.of !== mine?.id) {
      update.of = mine?.id;
      name.value = mine?.name ?? '';
    }
    refill(list, ...state.kept.map((one) => {
      const key = { 'data-key': one.id };
      return make('li', { className: one.id === mine?.id ? 'chosen' : '' },
        make('b', { textContent: one.name }), make('span', { className: 'where-is', textContent: placeText(one.roof) }),
        make('span', { className: 'acts' },
          button('Open', () => open(one), key),
          button('Compare', () => compare(one), { 'aria-label': `Compare ${one.name} with this roof` }),
          make('a', { href: `/report/${encodeURIComponent(one.id)}`, textContent: 'Report', 'aria-label': `Report on ${one.name}` }),
          make('a', { href: `/report/${encodeURIComponent(one.id)}.pdf`, textContent: 'PDF', 'aria-label': `Report on ${one.name} as PDF` }),
          button('Forget', () => forget(one.id), { 'aria-label': `Forget ${one.name}` })));
    }));
  }
  update.of = /** @type {string|undefined} */ ('none');
  return { update };
}
