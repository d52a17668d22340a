/** The parts of a chain from the aerial down: a row of fields each, moved, taken out, added, and fed. */

import { couldFeed, fed, fedBy, idsOf, joins, moved, withoutPart, withPart } from './chain_edits.js';
import { button, field, make, refill, select } from './dom.js';
import { CAN_BE_ADDED, fieldsOf, PART_WORDS } from './part_fields.js';

/**
 * @param {HTMLElement} list
 * @param {{fields: ReturnType<typeof import('./bound_fields.js').createBoundFields>, change: (next: any) => void}} tools
 */
export function createPartRows(list, { fields, change }) {
  let added = 'outlet';

  /**
   * @param {any} chain @param {import('./state.js').State} state @param {any[]} chains every chain there is
   * @param {boolean} branches whether it is shown which part feeds which
   */
  function draw(chain, state, chains, branches) {
    const feeds = state.answer?.chains[chain.name]?.fed_by ?? {};
    refill(list, ...chain.parts.map((one, place) => row(chain, one, place, state, branches ? feeds : null)), adder(chain, chains));
  }

  function row(chain, one, place, state, feeds) {
    const at = (key) => ({ part: place, key });
    const boxes = fieldsOf(one, chain).map(({ key, label, unit, choices, whole, table }) => {
      if (table) return fields.table(label, at(key), chain, unit ?? '', table);
      const listed = key === 'cable' ? (state.cables ?? [one.cable]).map((name) => [name, name]) : choices;
      return listed ? fields.choice(label, at(key), chain, listed, unit) : fields.figure(label, at(key), chain, unit, whole);
    });
    return make('li', { className: one.kind === 'outlet' ? 'a-part an-outlet' : 'a-part' },
      make('span', { className: 'kind', textContent: PART_WORDS[one.kind] ?? one.kind }),
      make('div', { className: 'fields' }, fields.text('Name', at('name'), chain), ...boxes, fields.figure('Price', at('price'), chain, chain.currency), ...(feeds ? feeding(chain, one, place, feeds) : [])),
      make('span', { className: 'moves' }, ...moves(chain, one, place)),
      ...measured(chain, one, place),
      fields.note(place));
  }

  function moves(chain, one, place) {
    const step = (words, by, text) => button(text, () => change(moved(chain, place, by)), { 'aria-label': `Move ${one.name} ${words}`, 'data-key': `${one.id}${text}` });
    const aerials = chain.parts.filter((each) => each.kind === 'aerial').length;
    return [
      ...(place > 1 ? [step('nearer to the aerial', -1, '↑')] : []),
      ...(place > 0 && place < chain.parts.length - 1 ? [step('farther from the aerial', 1, '↓')] : []),
      ...(place > 0 || aerials > 1 ? [button('Take out', () => takenOut(chain, place), { 'aria-label': `Take out ${one.name}` })] : []),
    ];
  }

  /** The focus goes on to what stands there now. */
  function takenOut(chain, place) {
    change(withoutPart(chain, place));
    const rows = list.querySelectorAll('.a-part');
    /** @type {HTMLElement|null} */ (rows[Math.min(place, rows.length - 1)]?.querySelector('input'))?.focus();
  }

  /** What was measured on an aerial, and how it is left out again. */
  function measured(chain, one, place) {
    const leave = (words, apply) => button(words, () => {
      const next = structuredClone(chain);
      apply(next.parts[place]);
      change(next);
    }, { 'data-key': `${one.id}${words}` });
    return [
      ...(one.pattern === 'measured' ? [make('p', { className: 'measured-of' }, `Measured pattern of ${one.cuts.length} ${one.cuts.length === 1 ? 'cut' : 'cuts'}. `, leave('Leave the pattern out', (part) => { delete part.cuts; part.pattern = 'class'; }))] : []),
      ...(one.reflection?.length ? [make('p', { className: 'measured-of' }, `Measured match at ${one.reflection.length} frequencies. `, leave('Leave the match out', (part) => { delete part.reflection; delete part.gain_includes_mismatch; }))] : []),
    ];
  }

  /** Which part stands before one: by its place in the list unless it is said. */
  function feeding(chain, one, place, feeds) {
    if (['aerial', 'mast'].includes(one.kind) || (one.kind === 'receiver' && !fedBy(one).length)) return [];
    const names = new Map(chain.parts.map((each) => [each.id, each.name]));
    const byPlace = (feeds[one.id] ?? []).map((id) => names.get(id) ?? id).join(' and ');
    const usual = `by its place${byPlace && !fedBy(one).length ? `: ${byPlace}` : ''}`;
    const chosen = new Set(fedBy(one).length ? fedBy(one) : feeds[one.id] ?? []);
    const could = couldFeed(chain, one).filter((each) => !joins(one) || chosen.has(each.id) || chain.parts.indexOf(each) < place);
    if (joins(one)) {
      const toggle = (id, on) => change(fed(chain, place, could.map((each) => each.id).filter((each) => (each === id ? on : chosen.has(each)))));
      return [make('fieldset', { className: 'joins' }, make('legend', { textContent: 'Joins' }), ...could.map((each) => make('label', {},
        make('input', { type: 'checkbox', checked: chosen.has(each.id), onchange: (event) => toggle(each.id, event.target.checked), 'data-key': `${one.id}<${each.id}` }), ` ${each.name}`)))];
    }
    const before = select([['', usual], ...could.map((each) => [each.id, each.name])], fedBy(one)[0] ?? '', {
      onchange: () => change(fed(chain, place, before.value ? [before.value] : [])), 'data-key': `${one.id}<`,
    });
    const tap = chain.parts.find((each) => each.id === fedBy(one)[0])?.kind === 'tap';
    const way = select([['', 'a tapped port'], ['through', 'the way through']], one.port ?? '', {
      onchange: () => {
        const next = structuredClone(chain);
        if (way.value) next.parts[place].port = way.value;
        else delete next.parts[place].port;
        change(next);
      },
      'data-key': `${one.id}=`,
    });
    const stands = field('Stands after', before);
    stands.classList.add('wide-field');
    return [stands, ...(tap ? [field('At', way)] : [])];
  }

  function adder(chain, chains) {
    const kinds = select(CAN_BE_ADDED.map((kind) => [kind, kind === 'aerial' ? 'Second aerial, joined' : PART_WORDS[kind]]), added, { 'aria-label': 'Kind of part to add', 'data-key': 'kind', onchange: () => { added = kinds.value; } });
    return make('li', { className: 'adder' }, kinds, button('Add it', () => change(withPart(chain, kinds.value, idsOf(chains))), { 'data-key': 'add' }));
  }
  return { draw };
}
