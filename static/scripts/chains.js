/** Chains, edited in place; the answer follows. */

import { createBoundFields } from './bound_fields.js';
import { draftOf, hasBranches } from './chain_edits.js';
import { button, make, part, refill } from './dom.js';
import { BEGINNING } from './part_fields.js';
import { createPartRows } from './part_rows.js';
import { plain, sentence } from './sentence.js';
import { chainsHere, titleOf, verdictOf } from './state.js';
import { asSentence, countText, moneyText } from './units.js';

const PAUSE_MS = 250; // after the last key, before the answer is asked for

/**
 * @param {HTMLElement} element
 * @param {{edit: (chain: any) => void, drop: (name: string) => void, keep: (chain: any) => Promise<void>, remove: (name: string) => Promise<void>, choose: (change: object) => void, show: (name: string) => void}} actions
 */
export function createChains(element, { edit, drop, keep, remove, choose, show }) {
  const chooser = part(element, '.which');
  const frame = part(element, '.frame-fields');
  const buttons = part(element, '.chain-buttons');
  const told = part(element, '.total');
  const result = part(element, '.result');
  const problem = part(element, '.chain-problem');
  const branching = part(element, '.branching input');
  let chosen = '';
  let timer = 0;
  let drawn = '';
  /** A chain as it is being typed, before it is asked for. @type {any} */
  let pending = null;
  /** @type {any} */
  let chain = null;
  /** @type {import('./state.js').State} */
  let state;
  const fields = createBoundFields({
    now: (apply) => change(applied(apply)),
    later: (apply) => {
      chain = pending = applied(apply);
      if (state.opened !== chosen) show(chosen); // stays open, whatever becomes the best idea
      clearTimeout(timer);
      timer = window.setTimeout(flush, PAUSE_MS);
    },
  });
  const rows = createPartRows(part(element, '.parts'), { fields, change });
  part(element, '.begin').addEventListener('click', () => choose({ edits: [...state.edits, structuredClone(BEGINNING)], opened: BEGINNING.name, idea: BEGINNING.name }));
  chooser.addEventListener('change', () => { flush(); show(chooser.value); });
  branching.addEventListener('change', () => { drawn = ''; update(state); });

  /** @param {(draft: any) => void} apply */
  function applied(apply) {
    const draft = draftOf(chain);
    apply(draft);
    return draft;
  }

  /** @param {any} next */
  function change(next) {
    clearTimeout(timer);
    pending = null;
    if (state.opened !== chosen) show(chosen);
    edit(draftOf(next));
  }

  function flush() {
    if (pending) change(pending);
  }

  /** @param {import('./state.js').State} next */
  function update(next) {
    state = next;
    if (element.hidden) return;
    const all = chainsHere(state);
    for (const one of ['.empty', '.begin']) part(element, one).hidden = all.length > 0;
    part(element, '.body').hidden = all.length === 0;
    if (!all.length) return;
    const before = chosen;
    chosen = [state.opened, verdictOf(state)?.candidate, state.now].find((name) => all.some((one) => one.name === name)) ?? all[0].name;
    if (chosen !== before) branching.checked = false;
    chain = pending?.name === chosen ? pending : all.find((one) => one.name === chosen);
    const at = state.trouble?.at ?? null;
    const marked = (one) => `${titleOf(state, one.name)}${isKept(one.name) ? (state.edits.includes(one) ? ' (changed)' : '') : ' (not kept yet)'}${at?.chain === one.name ? ' (to be mended)' : ''}`;
    refill(chooser, ...all.map((one) => make('option', { value: one.name, textContent: marked(one) })));
    chooser.value = chosen;
    controls();
    const branches = hasBranches(chain) || branching.checked;
    branching.checked = branches;
    branching.disabled = hasBranches(chain);
    const shape = chain.parts.map((one) => [one.kind, one.id, one.pattern, one.reflection?.length, branches && [one.name, one.after, one.port]]);
    const structure = JSON.stringify([chosen, shape, branches && state.answer?.chains[chosen]?.fed_by]);
    if (structure !== drawn) {
      drawn = structure;
      draw(all, branches);
    }
    const mine = at?.chain === chosen ? { message: state.trouble?.message ?? '', at } : null;
    const said = fields.refresh(chain, mine);
    problem.textContent = mine && !said ? mine.message : '';
    told.textContent = total();
    result.textContent = mine ? `${titleOf(state, chosen)} cannot be as it is now: mend it below. What is shown is the answer from before.` : effect();
    result.classList.toggle('old', state.asking || mine !== null);
  }

  /** @param {string} name */
  function isKept(name) {
    return (state.chains ?? []).some((one) => one.name === name);
  }

  /** What the chain brings, beside its fields: the answer itself may be far up the page. */
  function effect() {
    const { answer } = state;
    const verdict = answer?.verdicts.find((one) => one.candidate === chosen);
    if (verdict) return plain(sentence(answer, verdict));
    const entry = answer?.chains[chosen];
    return entry ? `${titleOf(state, chosen)} is up now: ${countText(entry.expected_count)} of ${answer.multiplexes.length}.` : 'Place the roof to see what it brings there.';
  }

  function total() {
    const entry = state.answer?.chains[chosen];
    if (!entry) return '';
    const findings = [...(entry.findings ?? []), ...(entry.wind?.findings ?? [])];
    const price = entry.price === null ? 'Its price is not known: fill in every price to have one.' : `${moneyText(entry.price, chain.currency)} bought whole, with labour and visit.`;
    return [price, ...findings.map(asSentence)].join(' ');
  }

  function controls() {
    const changed = state.edits.some((one) => one.name === chosen);
    const shown = verdictOf(state);
    const canBeIdea = chosen !== state.now && shown?.candidate !== chosen;
    const tried = async (action) => {
      try { await action(); } catch (error) { problem.textContent = error.message; }
    };
    refill(buttons,
      ...(canBeIdea ? [button('Show it as idea 1', () => { flush(); choose({ idea: chosen }); }, { 'data-key': 'idea' })] : []),
      button('Start another from this', copy, { 'data-key': 'copy' }),
      ...(changed ? [button(isKept(chosen) ? 'Keep the changes' : 'Keep this chain', () => { flush(); void tried(() => keep(chain)); }, { 'data-key': 'keep' })] : []),
      ...(changed ? [button(isKept(chosen) ? 'Back to the kept one' : 'Drop it', () => { clearTimeout(timer); pending = null; drop(chosen); }, { 'data-key': 'drop' })] : []),
      ...(isKept(chosen) ? [button('Remove from the kept', () => tried(() => remove(chosen)), { 'data-key': 'remove' })] : []));
  }

  /** Another like this one; it is shown as idea 1, so that what is changed in it is seen. */
  function copy() {
    flush();
    const taken = new Set(chainsHere(state).map((one) => one.name));
    let number = 2;
    while (taken.has(`${chosen}-${number}`)) number += 1;
    const made = { ...draftOf(chain), name: `${chain.name}-${number}`, title: `${titleOf(state, chain.name)} ${number}`, already_up: false };
    choose({ edits: [...state.edits, made], idea: made.name, opened: made.name });
  }

  /** @param {any[]} all @param {boolean} branches */
  function draw(all, branches) {
    fields.clear();
    const of = (key) => ({ part: null, key });
    const rods = [['', 'the better way'], ['horizontal', 'flat'], ['vertical', 'upright']];
    refill(frame,
      fields.text('Called', of('title'), chain, '', chain.name),
      fields.figure('Labour', of('labour_price'), chain, chain.currency),
      fields.figure('Visit', of('visit_price'), chain, chain.currency),
      fields.figure('Turned to', of('pointing_deg'), chain, '° true; empty: the best'),
      fields.choice('Rods', of('polarisation'), chain, rods),
      fields.note(null));
    rows.draw(chain, state, all, branches);
  }
  return { update };
}
