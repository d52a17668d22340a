/** Readings of this roof: what to read next, what was read and what it moved, and the logbook of all roofs. */

import { button, field, make, part, refill, select } from './dom.js';
import { MEASURING_AERIAL, NOTHING, titleOf, verdictOf, chainsHere } from './state.js';
import { bearingText, chanceText, dayText, moneyText, numberText, parseNumber, signedText } from './units.js';

const KINDS = [['level', 'level, dB(µV)'], ['mer', 'MER, dB'], ['cn', 'C/N, dB'], ['perfect', 'perfect'], ['breaks up', 'breaks up'], ['not found', 'not found']];
const INSTRUMENTS = [['meter', 'installer’s meter'], ['analyser', 'analyser'], ['stick', 'tuner stick'], ['set', 'the set’s own menu']];

/**
 * @param {HTMLElement} element
 * @param {{read: (reading: any) => Promise<any>, forget: (id: string) => void, confirm: (item: any) => void, logbook: () => Promise<any>}} actions
 */
export function createReadings(element, { read, forget, confirm, logbook }) {
  const next = part(element, '.next');
  const form = part(element, 'form.one');
  const scan = part(element, 'form.scan');
  const problem = part(element, '.problem');
  const list = part(element, '.items');
  const moved = part(element, '.moved');
  const book = part(element, '.logbook');
  const found = part(element, '.recognised');
  const value = make('input', { type: 'text', inputMode: 'decimal' });
  const of = make('select');
  const kind = select(KINDS, 'level');
  const chain = make('select');
  const point = make('select');
  const instrument = select(INSTRUMENTS, 'meter');
  const note = make('input', { type: 'text', maxLength: 200 });
  /** @type {import('./state.js').State} */
  let state;
  /** @type {string | undefined} */
  let upNow;
  form.prepend(field('Channel or multiplex', of), field('What was read', kind), field('Figure', value), field('Through', chain), field('At', point), field('With', instrument), field('Note', note));
  kind.addEventListener('change', shape);
  chain.addEventListener('change', points);

  function shape() {
    const figure = ['level', 'mer', 'cn'].includes(kind.value);
    value.disabled = !figure;
    instrument.disabled = !figure;
  }

  form.addEventListener('submit', async (event) => {
    event.preventDefault();
    const [what, id] = [of.value.slice(0, 1), of.value.slice(2)];
    const named = what === 'e' ? { emission: id } : { multiplex: id };
    const common = { ...named, chain: chain.value, day: new Date().toISOString().slice(0, 10), ...(note.value ? { note: note.value } : {}), ...(point.value ? { point: point.value } : {}) };
    if (value.disabled) return keep({ kind: 'seen', state: kind.value, ...common });
    const number = parseNumber(value.value);
    problem.textContent = number === null ? 'Write the figure as a number, such as 52.' : '';
    value.toggleAttribute('aria-invalid', number === null);
    if (number !== null) await keep({ kind: kind.value, value_db: number, instrument: instrument.value, ...common });
  });
  scan.addEventListener('submit', async (event) => {
    event.preventDefault();
    const area = part(scan, 'textarea');
    if (!area.value.trim()) return void (problem.textContent = 'Paste what the set lists, one channel to a line.');
    const done = await keep({ kind: 'scan list', text: area.value, complete: part(scan, '[name=complete]').checked, chain: state.now, day: new Date().toISOString().slice(0, 10) });
    if (!done) return;
    area.value = '';
    const rest = done.scan_list?.not_recognised ?? [];
    found.replaceChildren(...(done.scan_list?.recognised ?? []).map((one) => make('li', { textContent: `${one.text}: ${onAir(one.of)}, ${one.state}` })), ...rest.map((one) => make('li', { className: 'rest', textContent: `not recognised: ${one.text}` })));
  });
  part(element, '.show-logbook').addEventListener('click', async () => {
    const document = await logbook();
    if (document) told(document);
  });

  /** @param {any} reading */
  async function keep(reading) {
    try {
      const done = await read(reading);
      problem.textContent = '';
      value.value = '';
      note.value = '';
      return done;
    } catch (error) {
      problem.textContent = error.message;
      return null;
    }
  }

  /** @param {import('./state.js').State} now */
  function update(now) {
    state = now;
    if (element.hidden) return;
    const ready = Boolean(state.answer);
    part(element, '.empty').hidden = ready;
    part(element, '.body').hidden = !ready;
    if (!ready) return;
    toRead();
    fill();
    items();
    moved.replaceChildren(...(state.moved.length ? [make('p', { textContent: 'Moved by the last reading:' }), make('ul', {}, ...state.moved.map((one) => make('li', {}, `${one.name}: ${chanceText(one.before)} `, make('b', { textContent: `→ ${chanceText(one.after)}` }))))] : []));
  }

  function toRead() {
    const verdict = verdictOf(state);
    const one = verdict?.measure_next;
    const emission = state.answer.emissions.find((each) => each.id === one?.emission);
    if (!one || !emission) return void next.replaceChildren(make('p', { textContent: 'No single reading would change the answer enough to be worth taking first.' }));
    const currency = state.answer.chains[verdict.candidate]?.currency;
    const from = (tip) => (tip.from_dbuv === null ? `below ${numberText(tip.to_dbuv, 0)}` : tip.to_dbuv === null ? `above ${numberText(tip.from_dbuv, 0)}` : `${numberText(tip.from_dbuv, 0)} to ${numberText(tip.to_dbuv, 0)}`);
    next.replaceChildren(
      make('p', {}, 'Read next: ', make('b', { textContent: `${emission.channel ? `channel ${emission.channel}` : `${emission.frequency_mhz} MHz`} at ${bearingText(one.bearing_deg)}` }), ` (${emission.transmitter_name}), ${readAt(one)}: expected ${numberText(one.expected_dbuv ?? 0, 0)} dB(µV). Knowing it is worth ${moneyText(one.value, currency)}.`),
      make('ul', {}, ...(one.tipping ?? []).map((tip) => make('li', {}, `${from(tip)} dB(µV): `, make('b', { textContent: tip.answer ?? 'no answer' }), tip.why ? `, ${tip.why}` : ''))));
  }

  /** Where, and through what: a level means nothing without. */
  function readAt(one) {
    if (one.through === MEASURING_AERIAL) return 'with a measuring aerial of 6 dBd straight into the meter';
    return `at the outlet ${one.point} through ${titleOf(state, one.through)}`;
  }

  function fill() {
    const emissions = state.answer.emissions.map((one) => [`e:${one.id}`, `${one.channel ? `channel ${one.channel}` : `${one.frequency_mhz} MHz`}, ${nameOf(one.multiplex)} from ${one.transmitter_name}`]);
    const whole = state.answer.multiplexes.map((one) => [`m:${one.id}`, one.name]);
    renew(of, [...whole, ...emissions]);
    if (upNow !== state.now) chain.replaceChildren(); // what is up is read through, not what was before
    upNow = state.now;
    const measuring = [MEASURING_AERIAL, 'a measuring aerial, 6 dBd'];
    const kept = chainsHere(state).map((one) => [one.name, titleOf(state, one.name)]);
    renew(chain, state.now === NOTHING ? [measuring, ...kept] : [...kept, measuring], state.now === NOTHING ? MEASURING_AERIAL : state.now);
    points();
    shape();
    scan.hidden = state.now === NOTHING;
    part(element, '.no-scan').hidden = !scan.hidden;
  }

  function points() {
    if (chain.value === MEASURING_AERIAL) return renew(point, [['aerial', 'its terminals']]);
    const parts = chainsHere(state).find((one) => one.name === chain.value)?.parts ?? [];
    renew(point, [['', 'the weakest outlet'], ['aerial', 'the aerial'], ...parts.filter((one) => one.kind === 'outlet').map((one) => [one.name, one.name])]);
  }

  /** What a line of a list was taken for: a multiplex, or one channel. */
  function onAir(id) {
    const emission = state.answer?.emissions.find((one) => one.id === id);
    return emission ? `${nameOf(emission.multiplex)} from ${emission.transmitter_name}` : nameOf(id);
  }

  const nameOf = (id) => state.answer?.multiplexes.find((one) => one.id === id)?.name ?? id;

  function items() {
    const readings = state.answer.readings;
    refill(list, ...(readings?.items ?? []).map(item));
    part(element, '.none').hidden = (readings?.items ?? []).length > 0;
    part(element, '.findings').replaceChildren(...(readings?.findings ?? []).map((one) => make('li', { textContent: typeof one === 'string' ? one : (one.sentence ?? one.message ?? '') })));
  }

  /** @param {any} one */
  function item(one) {
    const emission = state.answer.emissions.find((each) => each.id === one.read_of);
    const what = emission ? `channel ${emission.channel || `${emission.frequency_mhz} MHz`}, ${nameOf(emission.multiplex)}` : nameOf(one.multiplex ?? one.emission ?? one.kind);
    const figure = one.state ?? (one.value_db === undefined ? one.kind : `${numberText(one.value_db, 1)} dB${one.kind === 'level' ? '(µV)' : ` ${one.kind === 'mer' ? 'MER' : 'C/N'}`}`);
    const against = one.predicted_db === null || one.read_db === null ? '' : `, ${numberText(one.predicted_db, 1)} was foreseen (${signedText(one.read_db - one.predicted_db)} dB)`;
    const not = one.used ? '' : `kept but not used: ${one.reason}`;
    return make('li', {},
      make('b', { textContent: figure }), ` ${what}${one.day ? `, ${dayText(one.day)}` : ''}${against}`,
      not ? make('span', { className: 'not-used', textContent: ` ${not}` }) : '',
      ...(one.candidates ?? []).map((text) => make('span', { className: 'not-used', textContent: ` ${text}` })),
      ...(one.id ? [' ', ...(one.used ? [] : [button('It was right', () => confirm(one), { 'data-key': `right-${one.id}` })]), button('Forget it', () => forget(one.id), { 'data-key': `forget-${one.id}`, 'aria-label': `Forget the reading of ${what}` })] : []));
  }

  /** @param {any} document */
  function told(document) {
    const { summary, entries } = document;
    book.replaceChildren(
      make('p', { textContent: summary.readings ? `${summary.readings} figures read on all roofs: ${signedText(summary.mean_db)} dB against the prediction on average${summary.spread_db === null ? '' : `, spread ${numberText(summary.spread_db, 1)} dB`}.` : 'No figure has been read on any roof yet: keep a level, an MER or a C/N first.' }),
      ...(entries.length ? [make('table', {}, make('thead', {}, make('tr', {}, ...['Day', 'Of', 'Read', 'Foreseen', 'Difference'].map((textContent) => make('th', { scope: 'col', textContent })))),
        make('tbody', {}, ...entries.slice(-200).map((one) => make('tr', {}, make('th', { scope: 'row', textContent: one.day ?? '' }), ...[one.read_of, numberText(one.read_db, 1), numberText(one.predicted_db, 1), signedText(one.difference_db)].map((textContent) => make('td', { textContent }))))))] : []));
  }
  return { update };
}

/** Gives a list new choices without losing the chosen one. @param {any} list @param {string[][]} pairs @param {string} [first] */
function renew(list, pairs, first) {
  const now = JSON.stringify(pairs);
  if (list.dataset.pairs === now && list.children.length) return;
  const chosen = list.value || first;
  list.dataset.pairs = now;
  list.replaceChildren(...pairs.map(([value, textContent]) => make('option', { value, textContent })));
  if (pairs.some(([value]) => value === chosen)) list.value = chosen;
}
