/** What is on the air: searched, filtered, switched on and off, with the days of validity. */

import { make, part } from './dom.js';
import { found, SHOWN_ROWS } from './air_list.js';
import { bearingText, distanceText, numberText, dayText } from './units.js';

/**
 * @param {HTMLElement} element
 * @param {{load: () => Promise<any>, turn: (id: string, on: boolean) => Promise<void>}} actions
 */
export function createTransmitters(element, { load, turn }) {
  const search = part(element, '[name=search]');
  const filter = part(element, '[name=filter]');
  const body = part(element, 'tbody');
  const count = part(element, '.count');
  const problem = part(element, '.problem');
  /** @type {any[]|null} */
  let rows = null;
  /** @type {import('./state.js').State} */
  let state;
  search.addEventListener('input', draw);
  filter.addEventListener('change', draw);
  body.addEventListener('change', async (event) => {
    const { value, checked } = event.target;
    try {
      await turn(value, checked);
      problem.textContent = '';
      rows = (rows ?? []).map((one) => (one.id === value ? { ...one, on: checked } : one));
    } catch (error) {
      event.target.checked = !checked;
      problem.textContent = error.message;
    }
  });

  /** @param {import('./state.js').State} next */
  function update(next) {
    const other = next.answer !== state?.answer || next.units !== state?.units;
    state = next;
    if (element.hidden) return;
    if (rows === null) {
      rows = [];
      count.textContent = 'Reading the list …';
      load().then((all) => { rows = all; problem.textContent = ''; draw(); }).catch((error) => { rows = null; count.textContent = ''; problem.textContent = error.message; });
    } else if (other && rows.length) {
      draw();
    }
  }

  function draw() {
    const today = new Date().toISOString().slice(0, 10);
    const near = new Map((state.answer?.emissions ?? []).map((one) => [one.id, one]));
    const shown = found(rows ?? [], { search: search.value, filter: filter.value, near, today });
    count.textContent = shown.length === 0
      ? ((rows ?? []).length ? 'Nothing fits: shorten the search or choose another filter.' : 'No transmitter is stored: import a list with “gainworth transmitters import FILE”.')
      : `${shown.length} of ${(rows ?? []).length} channels${shown.length > SHOWN_ROWS ? `; the first ${SHOWN_ROWS} are shown, search to find others` : ''}`;
    body.replaceChildren(...shown.slice(0, SHOWN_ROWS).map((one) => {
      const here = near.get(one.id);
      const validity = one.valid_to ? `closes on ${dayText(one.valid_to)}` : one.valid_from && one.valid_from > today ? `opens on ${dayText(one.valid_from)}` : '';
      return make('tr', {},
        make('td', {}, make('input', { type: 'checkbox', value: one.id, checked: one.on, 'aria-label': `${one.transmitter} channel ${one.channel} counts` })),
        make('th', { scope: 'row', textContent: one.transmitter }),
        make('td', { textContent: one.multiplex }),
        make('td', { textContent: one.channel ? `channel ${one.channel}` : `${one.frequency_mhz} MHz` }),
        make('td', { textContent: `${numberText(one.erp_kw, one.erp_kw < 10 ? 2 : 0)} kW` }),
        make('td', { textContent: here ? `${bearingText(here.bearing_deg)}, ${distanceText(here.distance_km, state.units)}` : '' }),
        make('td', { textContent: validity }));
    }));
  }
  return { update };
}
