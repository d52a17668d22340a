/** Every value that was chosen: read, changed, reset; and where everything comes from. */

import { button, field, make, part, refill, select } from './dom.js';
import { distanceIn, parseDistance, parseNumber, plainText } from './units.js';

const HOURS = [['50', 'half of the year'], ['90', 'lost 877 hours in an average year (90 %)'], ['99', 'lost 88 hours in an average year (99 %)']];
const METHODS = [['both', 'P.1812, P.1546 where that cannot'], ['p1812', 'P.1812 alone'], ['p1546', 'P.1546 alone']];

/**
 * @param {HTMLElement} element
 * @param {{choose: (change: object) => void, units: (units: string) => void}} actions
 */
export function createAssumptions(element, { choose, units }) {
  const settings = part(element, '.settings');
  const list = part(element, 'tbody');
  const reset = part(element, '.reset');
  const search = part(element, '[name=find]');
  const sources = part(element, '.sources');
  const problem = part(element, '.problem');
  /** @type {import('./state.js').State} */
  let state;
  const set = (key, value, usual) => {
    const next = { ...state.settings, [key]: value };
    if (value === usual || value === null) delete next[key];
    choose({ settings: next });
  };
  const figure = (key, usual, read = parseNumber) => make('input', { type: 'text', inputMode: 'decimal', onchange: ({ target }) => {
    const found = target.value.trim() ? read(target.value) : null;
    const strange = found === null && target.value.trim() !== '';
    refuse(target, strange, usual === null ? 'the chains’ own' : String(usual));
    if (!strange) set(key, found, usual);
  } });
  /** Says what cannot be read, and leaves the value as it was. @param {any} input @param {boolean} strange @param {string} example */
  const refuse = (input, strange, example) => {
    input.toggleAttribute('aria-invalid', strange);
    problem.textContent = strange ? `“${input.value}” is not a number: write one such as ${example}, or nothing for the default. What counts is still the value from before.` : '';
  };
  const availability = select(HOURS, '99', { onchange: () => set('availability_percent', Number(availability.value), 99) });
  const method = select(METHODS, 'both', { onchange: () => set('method', method.value, 'both') });
  const reach = figure('reach_km', 150, (text) => parseDistance(text, state.units));
  const worth = figure('worth_per_multiplex', null);
  const cost = figure('reading_cost', null);
  const measures = select([['metric', 'metres and kilometres'], ['imperial', 'feet and miles']], 'metric', { onchange: () => units(measures.value) });
  settings.append(field('Good enough is', availability), field('Method', method), field('Look for transmitters within', reach, 'km'), field('One more multiplex is worth', worth, 'in the chains’ currency'), field('Taking a reading costs', cost, 'in the chains’ currency'), field('Heights and distances in', measures));
  reset.addEventListener('click', () => choose({ assumptions: {}, settings: {} }));
  search.addEventListener('input', () => update(state));

  /** @param {import('./state.js').State} next */
  function update(next) {
    state = next;
    if (element.hidden || !state) return;
    availability.value = String(state.settings.availability_percent ?? 99);
    method.value = state.settings.method ?? 'both';
    measures.value = state.units;
    for (const [input, key, usual] of /** @type {any[][]} */ ([[reach, 'reach_km', 150], [worth, 'worth_per_multiplex', ''], [cost, 'reading_cost', '']])) {
      if (document.activeElement === input || input.hasAttribute('aria-invalid')) continue;
      const value = state.settings[key] ?? usual;
      input.value = value === '' ? '' : plainText(input === reach ? distanceIn(value, state.units) : value, 2);
    }
    part(/** @type {HTMLElement} */ (reach.closest('.field')), '.hint').textContent = state.units === 'imperial' ? 'mi' : 'km';
    const values = state.answer?.assumptions ?? state.values ?? [];
    const words = search.value.toLowerCase();
    const changed = Object.keys(state.assumptions).length + Object.keys(state.settings).length;
    reset.hidden = changed === 0;
    reset.textContent = `Put all ${changed} back to their defaults`;
    refill(list, ...values.filter((one) => `${one.id} ${one.reason}`.toLowerCase().includes(words)).map(row));
    const all = [...(state.answer?.sources ?? []).map((one) => [one.title, one.document, one.licence].filter(Boolean).join(', ')),
      ...(state.health?.ground.rasters ?? []).map((one) => `Ground: ${one.attribution || one.name}, every ${Math.round(one.spacing_m)} m`)];
    sources.replaceChildren(...[...new Set(all)].map((textContent) => make('li', { textContent })));
    part(element, '.no-sources').hidden = all.length > 0;
  }

  /** @param {any} one */
  function row(one) {
    const mine = one.id in state.assumptions;
    const change = (event) => {
      const number = parseNumber(event.target.value);
      refuse(event.target, number === null, String(one.value));
      if (number !== null) choose({ assumptions: { ...state.assumptions, [one.id]: number } });
    };
    const back = () => {
      const { [one.id]: _, ...rest } = state.assumptions;
      choose({ assumptions: rest });
    };
    return make('tr', { className: mine ? 'changed' : '' },
      make('th', { scope: 'row' }, make('span', { className: 'reason', textContent: one.reason }), make('span', { className: 'id', textContent: `${one.id}; ${one.source}` })),
      make('td', {}, make('input', { type: 'text', inputMode: 'decimal', value: plainText(mine ? state.assumptions[one.id] : one.value, 4), onchange: change, 'aria-label': `${one.id} in ${one.unit || 'its unit'}`, 'data-key': one.id }), make('span', { className: 'unit', textContent: ` ${one.unit}` })),
      make('td', {}, ...(mine ? [button('Back to the default', back, { 'aria-label': `Back to the default of ${one.id}` })] : [])));
  }
  return { update };
}
