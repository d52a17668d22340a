/** Every gain and loss of the shown cell, as a table and a staircase. */

import { shownCell, titleOf } from './state.js';
import { numberText, signedText } from './units.js';

const SVG = 'http://www.w3.org/2000/svg';

/** What the two time states say; the margin is the lower one. @type {Record<string, string>} */
const STATES = {
  a: 'the signal on a bad night, interferers as they usually are',
  b: 'the signal as it usually is, interferers on the night that carries them far',
};

/** @param {HTMLElement} element */
export function createLedger(element) {
  const title = /** @type {HTMLElement} */ (element.querySelector('h2'));
  const body = /** @type {HTMLElement} */ (element.querySelector('tbody'));
  const row = /** @type {HTMLTemplateElement} */ (document.getElementById('ledger-row'));

  /** @param {import('./state.js').State} state */
  function update(state) {
    const cell = shownCell(state);
    const outlets = cell?.through?.outlets ?? [];
    element.hidden = outlets.length === 0;
    if (outlets.length === 0) return;
    const outlet = outlets.reduce((least, one) => (one.margin_db < least.margin_db ? one : least));
    title.textContent = `${cell.multiplex.name} from the mast to ${outlet.name}, through ${titleOf(state, cell.chain)}`;
    const decides = outlet.held_back_by?.state;
    const steps = outlet.ledger.filter((step) => !decides || step.state === decides);
    const others = outlet.ledger.filter((step) => decides && step.state !== decides);
    const scale = { low: Math.min(0, ...outlet.ledger.map((step) => step.total)), high: Math.max(...outlet.ledger.map((step) => step.total)) };
    body.style.setProperty('--zero', `${placed(0, scale)}%`);
    body.replaceChildren(...steps.map((step, place) => line(step, place ? steps[place - 1].total : 0, scale)));
    body.append(line({ step: 'margin', value_db: null, total: outlet.margin_db, source: STATES[decides] ?? '' }, 0, scale));
    body.lastElementChild?.classList.add('result');
    if (others.length) {
      const other = others[others.length - 1];
      body.append(line({ step: 'margin in the other state', value_db: null, total: other.total, source: STATES[other.state] }, 0, scale));
    }
  }

  /** @param {any} step @param {number} from total before the step @param {{low: number, high: number}} scale */
  function line(step, from, scale) {
    const made = /** @type {HTMLElement} */ (row.content.cloneNode(true));
    made.querySelector('th').textContent = step.step;
    made.querySelector('.value').textContent = step.value_db === null ? '' : signedText(step.value_db);
    made.querySelector('.total').textContent = numberText(step.total, 1);
    made.querySelector('.source').textContent = step.source;
    const bar = document.createElementNS(SVG, 'rect');
    const [left, right] = [placed(from, scale), placed(step.total, scale)].sort((a, b) => a - b);
    for (const [key, value] of Object.entries({ x: left, y: 2, width: Math.max(0.4, right - left), height: 6 })) bar.setAttribute(key, String(value));
    bar.setAttribute('class', step.value_db === null ? 'end' : step.value_db < 0 ? 'down' : 'up');
    made.querySelector('svg').append(bar);
    return made;
  }
  return { update };
}

/** @param {number} value @param {{low: number, high: number}} scale @returns {number} percent of the width */
function placed(value, { low, high }) {
  return (100 * (value - low)) / (high - low || 1);
}
