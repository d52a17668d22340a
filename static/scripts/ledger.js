/** Every gain and loss of the shown cell from the mast to the set, as a table and a staircase, in both time states. */

import { make, part, shape } from './dom.js';
import { shownCell, titleOf } from './state.js';
import { bearingText, numberText, signedText } from './units.js';

/** What the two time states say; the margin is the lower one. @type {Record<string, string>} */
export const STATES = {
  a: 'the signal on a bad night, the others as they usually are',
  b: 'the signal as it usually is, the others on a night that carries them far',
};

/** @param {HTMLElement} element */
export function createLedger(element) {
  const title = part(element, 'h3');
  const held = part(element, '.held-back');
  const choices = part(element, '.states');
  const outletChoice = part(element, '.outlet');
  const body = part(element, 'tbody');
  const empty = part(element, '.empty');
  const full = part(element, '.body');
  let wish = '';
  let outletName = '';
  /** @type {import('./state.js').State} */
  let state;
  choices.addEventListener('change', (event) => { wish = event.target.value; update(state); });
  outletChoice.addEventListener('change', () => { outletName = outletChoice.value; update(state); });

  /** @param {import('./state.js').State} next */
  function update(next) {
    state = next;
    if (element.hidden) return;
    const cell = shownCell(state);
    const outlets = outletsOf(state, cell);
    full.hidden = outlets.length === 0;
    empty.hidden = outlets.length > 0;
    empty.textContent = cell ? 'Adding up every step …' : 'Place the roof first: every gain and loss is listed here then.';
    if (!cell || outlets.length === 0) return;
    const least = outlets.reduce((low, one) => (one.margin_db < low.margin_db ? one : low));
    const outlet = outlets.find((one) => one.name === outletName) ?? least;
    outletChoice.closest('.field').hidden = outlets.length < 2;
    outletChoice.replaceChildren(...outlets.map((one) => make('option', { value: one.name, textContent: one === least ? `${one.name}, the weakest` : one.name })));
    outletChoice.value = outlet.name;
    title.textContent = `${cell.multiplex.name} from the mast to ${outlet.name}, through ${titleOf(state, cell.chain)}`;
    held.textContent = heldBack(outlet.held_back_by, outlet, cell.emission);
    const states = [...new Set(outlet.ledger.map((step) => step.state))].sort();
    const decides = outlet.held_back_by?.state ?? states[0];
    const shown = states.includes(wish) ? wish : decides;
    const margins = Object.fromEntries(states.map((one) => [one, outlet.ledger.filter((step) => step.state === one).at(-1).total]));
    choices.hidden = states.length < 2;
    choices.replaceChildren(make('legend', { className: 'unseen', textContent: 'Which night' }), ...states.map((one) => make('label', {},
      make('input', { type: 'radio', name: 'night', value: one, checked: one === shown }),
      make('span', {}, `${STATES[one]}: `, make('b', { textContent: `${signedText(margins[one])} dB` }), one === decides ? ', which decides' : ''))));
    stairs(outlet.ledger.filter((step) => step.state === shown), margins[shown]);
  }

  /** @param {any[]} steps @param {number} margin */
  function stairs(steps, margin) {
    const totals = steps.map((step) => step.total);
    const scale = { low: Math.min(0, ...totals), high: Math.max(0, ...totals) };
    body.style.setProperty('--zero', `${placed(0, scale)}%`);
    body.replaceChildren(...steps.map((step, place) => line(step, place ? totals[place - 1] : 0, scale)));
    const last = line({ step: 'margin', value_db: null, total: margin, source: 'what is left above what the mode needs' }, 0, scale);
    last.classList.add('result');
    body.append(last);
  }

  /** @param {any} step @param {number} from total before the step @param {{low: number, high: number}} scale */
  function line(step, from, scale) {
    const [left, right] = [placed(from, scale), placed(step.total, scale)].sort((a, b) => a - b);
    const stair = shape('svg', { 'aria-hidden': 'true', viewBox: '0 0 100 10', preserveAspectRatio: 'none' });
    stair.append(shape('rect', { x: left, y: 2, width: Math.max(0.4, right - left), height: 6, class: step.value_db === null ? 'end' : step.value_db < 0 ? 'down' : 'up' }));
    return make('tr', {},
      make('th', { scope: 'row', textContent: step.step }),
      make('td', { className: 'number value', textContent: step.value_db === null ? '' : signedText(step.value_db) }),
      make('td', { className: 'number total', textContent: numberText(step.total, 1) }),
      make('td', { className: 'stair' }, stair),
      make('td', { className: 'source', textContent: step.source }));
  }
  return { update };
}

/** The outlets with their steps: those of the answer, or those fetched for this cell. */
function outletsOf(state, cell) {
  const own = cell?.through?.outlets ?? [];
  if (own[0]?.ledger?.length) return own;
  const of = state.steps;
  return of && cell && of.answer === state.answer && of.emission === cell.emission.id ? (of.chains[cell.chain]?.outlets ?? []) : [];
}

/**
 * What holds a cell back and how far the next limit is, in words.
 * @param {any} held @param {any} outlet @param {any} emission
 * @returns {string}
 */
export function heldBack(held, outlet, emission) {
  if (!held) return '';
  const margin = outlet.margin_db;
  const stands = margin < 0 ? `It misses what ${emission.system} needs by ${numberText(-margin, 1)} dB` : `It stands ${numberText(margin, 1)} dB above what ${emission.system} needs`;
  const by = held.transmitter_name ? ` from ${held.transmitter_name} at ${bearingText(held.bearing_deg)}` : '';
  const what = { noise: 'noise', time: 'bad nights', interference: `interference${by}`, overload: 'signals that are too strong' }[held.limit] ?? held.limit;
  const next = held.next_db === null || held.next_db === undefined ? '' : ` Without it, the next limit is ${numberText(Math.abs(held.next_db), 1)} dB away.`;
  const room = outlet.headroom_db === null || outlet.headroom_db === undefined ? '' : ` Room before too much level: ${numberText(outlet.headroom_db, 1)} dB.`;
  return `${stands}. What limits it is ${what}.${next}${room}`;
}

/** @param {number} value @param {{low: number, high: number}} scale @returns {number} percent of the width */
function placed(value, { low, high }) {
  return (100 * (value - low)) / (high - low || 1);
}
