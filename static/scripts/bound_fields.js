/** Fields of a chain: each shows one value of it, says how it is to be changed, and what is wrong with it. */

import { field, make, select } from './dom.js';
import { gainText, parseGain } from './part_fields.js';
import { parseNumber } from './units.js';

/**
 * @typedef {{part: number|null, key: string}} Spot  of a part, or of the chain itself
 * @typedef {{control: any, was: string, read: (chain: any) => string, spot: Spot, label: string, slip: string}} Bound  `was`: its value in the chain
 */

/** Values of one control as text. @param {any} value */
const asText = (value) => (value === undefined || value === null ? '' : String(value));

/**
 * @param {{now: (apply: (draft: any) => void) => void, later: (apply: (draft: any) => void) => void}} edits
 *   now: at once; later: after a pause in typing
 */
export function createBoundFields({ now, later }) {
  /** @type {Bound[]} */
  let bound = [];
  /** @type {Map<number|null, HTMLElement>} */
  const notes = new Map();
  let count = 0;

  const holder = (chain, part) => (part === null ? chain : chain.parts[part]);
  const put = (draft, { part, key }, value) => {
    const target = holder(draft, part);
    if (value === null || value === '') delete target[key];
    else target[key] = value;
  };

  /** @param {string} label @param {any} control @param {Spot} spot @param {(chain: any) => string} read @param {any} chain @param {string} [hint] */
  function bind(label, control, spot, read, chain, hint) {
    const one = { control, was: read(chain), read, spot, label, slip: '' };
    control.value = one.was;
    control.dataset.key = `${spot.part ?? 'chain'}:${spot.key}`;
    bound.push(one);
    return { one, element: field(label, control, hint) };
  }

  /** @param {Bound} one @param {string} text @param {string} slip */
  function typed(one, text, slip) {
    one.slip = slip;
    if (!slip) one.was = text;
    mark(one.spot.part, null);
  }

  return {
    clear() {
      bound = [];
      notes.clear();
    },

    /** Where what is wrong with a part, or with the chain itself, is said. @param {number|null} part */
    note(part) {
      const node = make('p', { className: 'problem field-problem', id: `chain-note-${(count += 1)}` });
      notes.set(part, node);
      return node;
    },

    /** @param {string} label @param {Spot} spot @param {any} chain @param {string} [hint] @param {string} [usual] where there is none */
    text(label, spot, chain, hint, usual) {
      const control = make('input', { type: 'text', oninput: () => {
        typed(one, control.value, control.value.trim() || spot.key !== 'name' ? '' : `${label}: give it a short name.`);
        if (!one.slip) later((draft) => put(draft, spot, control.value));
      } });
      const { one, element } = bind(label, control, spot, (of) => asText(holder(of, spot.part)?.[spot.key] || usual), chain, hint);
      return element;
    },

    /** @param {string} label @param {Spot} spot @param {any} chain @param {string} [hint] @param {boolean} [whole] */
    figure(label, spot, chain, hint, whole) {
      const control = make('input', { type: 'text', inputMode: 'decimal', oninput: () => {
        const empty = control.value.trim() === '';
        const number = parseNumber(control.value);
        const bad = !empty && (number === null || (whole && !Number.isInteger(number)));
        typed(one, asText(number), bad ? `${label}: “${control.value.trim()}” is not a ${whole ? 'whole ' : ''}number; write one such as 12.` : '');
        if (!bad) later((draft) => put(draft, spot, number));
      } });
      const { one, element } = bind(label, control, spot, (of) => asText(holder(of, spot.part)?.[spot.key]), chain, hint);
      return element;
    },

    /** A table of pairs. @param {string} label @param {Spot} spot @param {any} chain @param {string} hint @param {string} example */
    table(label, spot, chain, hint, example) {
      const control = make('input', { type: 'text', spellcheck: false, oninput: () => {
        const pairs = parseGain(control.value);
        typed(one, pairs ? gainText(pairs) : control.value, pairs ? '' : `${label}: write pairs by rising frequency, such as ${example}.`);
        if (pairs) later((draft) => put(draft, spot, pairs));
      } });
      const { one, element } = bind(label, control, spot, (of) => gainText(holder(of, spot.part)?.[spot.key] ?? []), chain, hint);
      element.classList.add('wide-field');
      return element;
    },

    /** @param {string} label @param {Spot} spot @param {any} chain @param {string[][]} pairs the first: as usual @param {string} [hint] */
    choice(label, spot, chain, pairs, hint) {
      const value = () => ({ true: true, false: false })[control.value] ?? control.value;
      const control = select(pairs, '', { onchange: () => now((draft) => put(draft, spot, value())) });
      return bind(label, control, spot, (of) => asText(holder(of, spot.part)?.[spot.key] ?? pairs[0][0]), chain, hint).element;
    },

    /**
     * Shows the values of a chain where they changed, and what is wrong where. What is being typed is left alone.
     * @param {any} chain @param {{message: string, at: {part: number|null, key: string|null}}|null} trouble of this chain
     * @returns {boolean} whether the trouble was said beside what it is about
     */
    refresh(chain, trouble) {
      for (const one of bound) {
        const text = one.read(chain);
        if (text === one.was) continue; // what was typed stands, also where it is no value
        one.was = text;
        if (one.control === document.activeElement) continue;
        one.control.value = text;
        one.slip = '';
      }
      for (const part of notes.keys()) mark(part, trouble);
      return trouble !== null && notes.has(trouble.at.part);
    },
  };

  /** @param {number|null} part @param {{message: string, at: {part: number|null, key: string|null}}|null} trouble */
  function mark(part, trouble) {
    const note = notes.get(part);
    if (!note) return;
    const mine = bound.filter((one) => one.spot.part === part);
    const here = trouble && trouble.at.part === part ? trouble : null;
    const wrong = mine.find((one) => one.spot.key === here?.at.key);
    const words = here && wrong ? here.message.replace(new RegExp(`\\b${wrong.spot.key}\\b`), `“${wrong.label}”`) : (here?.message ?? '');
    const text = [...mine.map((one) => one.slip), words].filter(Boolean).join(' ');
    if (note.textContent !== text) note.textContent = text;
    for (const one of mine) {
      if (one.slip || one === wrong) {
        one.control.setAttribute('aria-invalid', 'true');
        one.control.setAttribute('aria-describedby', note.id);
      } else {
        one.control.removeAttribute('aria-invalid');
        one.control.removeAttribute('aria-describedby');
      }
    }
  }
}
