/** Chains, edited in place; the answer follows. A block of flats begins from four answers. */

import { button, field, make, part, refill, select } from './dom.js';
import { fieldsOf, gainText, NEW_PARTS, parseGain, PART_WORDS } from './part_fields.js';
import { chainsHere, NOTHING, titleOf, verdictOf } from './state.js';
import { moneyText, parseNumber } from './units.js';

const PAUSE_MS = 250; // after the last key, before the answer is asked for

/**
 * @param {HTMLElement} element
 * @param {{edit: (chain: any) => void, drop: (name: string) => void, keep: (chain: any) => Promise<void>, remove: (name: string) => Promise<void>, block: (answers: any) => Promise<any>}} actions
 */
export function createChains(element, { edit, drop, keep, remove, block }) {
  const chooser = part(element, '.which');
  const form = part(element, '.parts');
  const frame = part(element, '.frame-fields');
  const buttons = part(element, '.buttons');
  const told = part(element, '.total');
  const problem = part(element, '.problem');
  const blockForm = part(element, '.block');
  const blockProblem = part(element, '.block-problem');
  let chosen = '';
  let timer = 0;
  let drawn = '';
  /** @type {any} */
  let chain = null;
  /** @type {import('./state.js').State} */
  let state;
  chooser.addEventListener('change', () => { chosen = chooser.value; drawn = ''; update(state); });

  blockForm.addEventListener('submit', async (event) => {
    event.preventDefault();
    const number = (name) => parseNumber(blockForm.elements.namedItem(name).value) ?? 0;
    try {
      const made = await block({ outlets: number('outlets'), layout: blockForm.elements.namedItem('layout').value, longest_m: number('longest'), shortest_m: number('shortest'), aerial: blockForm.elements.namedItem('aerial').value });
      blockProblem.textContent = (made.findings ?? []).join(' ');
      chosen = made.chain.name;
      drawn = '';
      update(state);
    } catch (error) {
      blockProblem.textContent = error.message;
    }
  });

  /** @param {import('./state.js').State} next */
  function update(next) {
    state = next;
    if (element.hidden) return;
    const all = chainsHere(state);
    part(element, '.empty').hidden = all.length > 0;
    part(element, '.body').hidden = all.length === 0;
    if (!all.length) return;
    if (!all.some((one) => one.name === chosen)) chosen = verdictOf(state)?.candidate ?? (state.now !== NOTHING && state.now ? state.now : all[0].name);
    if (!all.some((one) => one.name === chosen)) chosen = all[0].name;
    chain = all.find((one) => one.name === chosen);
    refill(chooser, ...all.map((one) => make('option', { value: one.name, textContent: `${titleOf(state, one.name)}${state.edits.includes(one) ? ' (changed)' : ''}` })));
    chooser.value = chosen;
    const entry = state.answer?.chains[chosen];
    const price = entry?.price ?? null;
    const findings = [...(entry?.findings ?? []), ...(entry?.wind?.message ? [entry.wind.message] : [])];
    told.textContent = `${price === null ? 'Its price is not known: fill in every price to have one.' : `${moneyText(price, chain.currency)} with labour and visit.`} ${findings.join(' ')}`;
    const mine = state.trouble?.field?.includes('parts') || state.trouble?.message.includes('chain') ? (state.trouble?.message ?? '') : '';
    problem.textContent = mine;
    controls();
    const structure = JSON.stringify([chosen, chain.parts.map((one) => [one.kind, one.id])]);
    if (structure !== drawn) {
      drawn = structure;
      draw();
    }
    aerials();
  }

  function aerials() {
    const list = blockForm.elements.namedItem('aerial');
    const known = new Map(chainsHere(state).map((one) => one.parts.find((each) => each.kind === 'aerial')).filter(Boolean).map((one) => [one.id, one.name]));
    const now = JSON.stringify([...known]);
    if (list.dataset.pairs === now) return;
    list.dataset.pairs = now;
    list.replaceChildren(...[...known].map(([value, textContent]) => make('option', { value, textContent })));
  }

  function controls() {
    const changed = state.edits.some((one) => one.name === chosen);
    const isKept = (state.chains ?? []).some((one) => one.name === chosen);
    const tried = async (action) => {
      try { await action(); problem.textContent = ''; } catch (error) { problem.textContent = error.message; }
    };
    refill(buttons,
      ...(changed ? [button('Keep the changes', () => tried(() => keep(chain)), { 'data-key': 'keep' })] : []),
      ...(changed ? [button(isKept ? 'Back to the kept one' : 'Drop it', () => { drawn = ''; drop(chosen); }, { 'data-key': 'drop' })] : []),
      button('Start another from this', copy, { 'data-key': 'copy' }),
      ...(isKept ? [button('Remove from the kept', () => tried(async () => { await remove(chosen); drawn = ''; }), { 'data-key': 'remove' })] : []));
  }

  function copy() {
    const taken = new Set(chainsHere(state).map((one) => one.name));
    let number = 2;
    while (taken.has(`${chosen}-${number}`)) number += 1;
    const { id, created, updated, ...rest } = chain;
    chosen = `${chain.name}-${number}`;
    edit({ ...rest, name: chosen, title: `${titleOf(state, chain.name)} ${number}`, already_up: false });
  }

  /** @param {(next: any) => void} apply changes a copy of the chain; asked for after a pause in typing */
  function later(apply) {
    const { id, created, updated, ...rest } = structuredClone(chain);
    apply(rest);
    chain = rest;
    clearTimeout(timer);
    timer = window.setTimeout(() => edit(rest), PAUSE_MS);
  }

  /** @param {(next: any) => void} apply */
  function now(apply) {
    const { id, created, updated, ...rest } = structuredClone(chain);
    apply(rest);
    edit(rest);
  }

  function draw() {
    const text = (label, value, apply, hint) => field(label, make('input', { type: 'text', value, oninput: (event) => later((next) => apply(next, event.target.value)) }), hint);
    const figure = (label, value, apply, hint) => field(label, make('input', {
      type: 'text', inputMode: 'decimal', value: value === undefined || value === null ? '' : String(value),
      oninput: (event) => {
        const number = event.target.value.trim() === '' ? null : parseNumber(event.target.value);
        const bad = event.target.value.trim() !== '' && number === null;
        event.target.toggleAttribute('aria-invalid', bad);
        if (!bad) later((next) => apply(next, number));
      },
    }), hint);
    const put = (target, key, value) => { if (value === null || value === '') delete target[key]; else target[key] = value; };
    frame.replaceChildren(
      text('Called', titleOf(state, chosen), (next, value) => put(next, 'title', value)),
      figure('Labour', chain.labour_price, (next, value) => put(next, 'labour_price', value), chain.currency),
      figure('Visit', chain.visit_price, (next, value) => put(next, 'visit_price', value), chain.currency),
      figure('Turned to', chain.pointing_deg, (next, value) => put(next, 'pointing_deg', value), '° true; empty: the best'),
      field('Rods', select([['', 'the better way'], ['horizontal', 'flat'], ['vertical', 'upright']], chain.polarisation ?? '', { onchange: (event) => now((next) => put(next, 'polarisation', event.target.value)) })));
    form.replaceChildren(...chain.parts.map((one, place) => row(one, place, { text, figure, put })), adder());
  }

  function row(one, place, { text, figure, put }) {
    const boxes = fieldsOf(one.kind).map(({ key, label, unit, choices, whole }) => {
      if (key === 'gain_dbd') {
        return field(label, make('input', { type: 'text', value: gainText(one.gain_dbd), oninput: (event) => {
          const gain = parseGain(event.target.value);
          event.target.toggleAttribute('aria-invalid', gain === null);
          if (gain) later((next) => { next.parts[place].gain_dbd = gain; });
        } }), unit);
      }
      const listed = key === 'cable' ? (state.cables ?? [one.cable]).map((name) => [name, name]) : choices;
      if (listed) return field(label, select(listed, one[key] ?? listed[0][0], { onchange: (event) => now((next) => put(next.parts[place], key, event.target.value)) }));
      return figure(label, one[key], (next, value) => put(next.parts[place], key, whole && value !== null ? Math.round(value) : value), unit);
    });
    const swap = (by) => now((next) => { const [taken] = next.parts.splice(place, 1); next.parts.splice(place + by, 0, taken); });
    return make('li', { className: one.kind === 'outlet' ? 'a-part an-outlet' : 'a-part' },
      make('span', { className: 'kind', textContent: PART_WORDS[one.kind] ?? one.kind }),
      make('div', { className: 'fields' }, text('Name', one.name, (next, value) => { next.parts[place].name = value; }), ...boxes,
        figure('Price', one.price, (next, value) => put(next.parts[place], 'price', value), chain.currency)),
      make('span', { className: 'moves' },
        ...(place > 1 ? [button('↑', () => swap(-1), { 'aria-label': `Move ${one.name} nearer to the aerial` })] : []),
        ...(place > 0 && place < chain.parts.length - 1 ? [button('↓', () => swap(1), { 'aria-label': `Move ${one.name} farther from the aerial` })] : []),
        ...(place > 0 ? [button('Take out', () => now((next) => { next.parts.splice(place, 1); }), { 'aria-label': `Take out ${one.name}` })] : [])));
  }

  function adder() {
    const kinds = select(Object.keys(NEW_PARTS).map((kind) => [kind, PART_WORDS[kind]]), 'outlet', { 'aria-label': 'Kind of part to add' });
    const add = () => now((next) => {
      const taken = new Set(next.parts.map((one) => one.id));
      let number = 1;
      while (taken.has(`${kinds.value}-${number}`)) number += 1;
      const last = next.parts.length - (next.parts.at(-1)?.kind === 'receiver' ? 1 : 0);
      next.parts.splice(kinds.value.endsWith('amplifier') ? 1 : last, 0, { kind: kinds.value, id: `${kinds.value}-${number}`, name: `${PART_WORDS[kinds.value]} ${number}`, ...NEW_PARTS[kinds.value] });
    });
    return make('li', { className: 'adder' }, kinds, button('Add it', add));
  }
  return { update };
}

