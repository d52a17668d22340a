/** Measured files of an aerial: its match, said channel by channel, and its pattern; both can be taken into a chain. */

import { draftOf } from './chain_edits.js';
import { button, make, part } from './dom.js';
import { sent } from './sent_file.js';
import { chainsHere, titleOf, verdictOf } from './state.js';
import { asSentence, numberText, parseNumber } from './units.js';

/**
 * @param {HTMLElement} element
 * @param {{match: (body: any) => Promise<any>, pattern: (body: any) => Promise<any>, edit: (chain: any) => void}} actions
 */
export function createMeasured(element, { match, pattern, edit }) {
  const chooser = part(element, '.into');
  const forms = { match: part(element, 'form.match'), pattern: part(element, 'form.pattern') };
  let picked = ''; // else the chain that is open
  /** @type {import('./state.js').State} */
  let state;

  for (const [what, form] of Object.entries(forms)) {
    const problem = part(element, `.${what}-problem`);
    const found = part(element, `.${what}-found`);
    form.addEventListener('submit', async (event) => {
      event.preventDefault();
      problem.textContent = '';
      try {
        found.replaceChildren(...(what === 'match' ? await readMatch(form) : await readPattern(form)));
      } catch (error) {
        found.replaceChildren();
        problem.textContent = error.message;
      }
    });
  }
  const named = (name) => forms.match.elements.namedItem(name);
  forms.match.addEventListener('change', pads);

  /** A pad is only asked for where one was in the way, its file only where it is one's own. */
  function pads() {
    const through = named('calibrated').value === 'before-pad';
    part(forms.match, '.pad-field').hidden = !through;
    part(forms.match, '.own-field').hidden = !through || named('pad').value !== 'own';
  }

  async function readMatch(form) {
    const through = named('calibrated').value === 'before-pad';
    const own = through && named('pad').value === 'own';
    const load = named('standard').value.trim();
    if (load && parseNumber(load) === null) throw new Error('Calibrated with: write the ohms of the load, such as 50 or 75, or leave it empty.');
    const body = {
      sweep: await sent(form.elements.namedItem('sweep'), 'the sweep of the aerial, a file that ends in .s1p'),
      calibrated: named('calibrated').value,
      pad: through ? named('pad').value : 'none',
      own_pad: own ? await sent(named('own'), 'the file of your pad, which ends in .s2p') : null,
      standard_ohm: load ? parseNumber(load) : null,
    };
    const got = await match(body);
    const { channels } = got;
    const title = `${got.file}: ${got.points} points from ${got.from_mhz} to ${got.to_mhz} MHz${got.pad_loss_db ? `, a pad of ${numberText(got.pad_loss_db, 1)} dB removed` : ''}.`;
    return [
      make('p', { textContent: title }),
      ...(channels.length ? [make('div', { className: 'scroll', tabIndex: 0, role: 'group', 'aria-label': 'Match by channel' }, matchTable(channels))] : [make('p', { textContent: 'Place the roof first: its channels are listed here then.' })]),
      make('p', { className: 'caution', textContent: got.caution }),
      ...(channels.length && channels.every((one) => one.refused) ? [] : into('Take the match into', { reflection: got.reflection })),
    ];
  }

  async function readPattern(form) {
    const got = await pattern({ file: await sent(form.elements.namedItem('file'), 'the pattern, our CSV or an NSMA file') });
    const cuts = got.cuts.map((cut) => make('li', { textContent: cutText(cut) }));
    return [make('ul', {}, ...cuts), ...into('Take the pattern into', got.aerial)];
  }

  /** A button for each aerial of the chosen chain. @param {string} words @param {any} keys of an aerial */
  function into(words, keys) {
    const chain = chainsHere(state).find((one) => one.name === chooser.value);
    const aerials = (chain?.parts ?? []).filter((one) => one.kind === 'aerial');
    return [make('p', { className: 'buttons' }, ...aerials.map((aerial) => button(`${words} ${aerial.name} of ${titleOf(state, chain.name)}`, () => {
      const next = draftOf(chainsHere(state).find((one) => one.name === chain.name) ?? chain);
      const part = next.parts.find((one) => one.id === aerial.id);
      if (part) edit({ ...next, parts: next.parts.map((one) => (one === part ? { ...one, ...keys } : one)) });
    })))];
  }

  /** @param {import('./state.js').State} next */
  function update(next) {
    state = next;
    const all = chainsHere(state).map((one) => [one.name, titleOf(state, one.name)]);
    const now = JSON.stringify(all);
    if (chooser.dataset.pairs !== now) {
      chooser.dataset.pairs = now;
      chooser.replaceChildren(...all.map(([value, textContent]) => make('option', { value, textContent })));
    }
    const wanted = [picked, state.opened, verdictOf(state)?.candidate, all[0]?.[0]].find((name) => all.some(([one]) => one === name));
    if (wanted !== undefined && chooser.value !== wanted) {
      chooser.value = wanted;
      forget();
    }
  }

  /** What was read is offered for the aerials of one chain. */
  function forget() {
    for (const one of ['.match-found', '.pattern-found']) part(element, one).replaceChildren();
  }
  chooser.addEventListener('change', () => { picked = chooser.value; forget(); });
  pads();
  return { update };
}

/** @param {any[]} channels */
function matchTable(channels) {
  const figure = (value, digits) => (value === null ? '' : numberText(value, digits));
  const heads = ['Channel', 'VSWR', 'Comes back weaker by, dB', 'give or take', 'Lost, dB'];
  return make('table', {},
    make('thead', {}, make('tr', {}, ...heads.map((textContent) => make('th', { scope: 'col', textContent })))),
    make('tbody', {}, ...channels.map((one) => make('tr', {}, make('th', { scope: 'row', textContent: one.channel }), ...(one.refused
      ? [make('td', { colSpan: 4, textContent: asSentence(one.refused.replace(/^.*?channel \S+: /, '')) })]
      : [figure(one.vswr, 2), figure(one.return_loss_db, 1), `${figure(one.return_loss_low_db, 1)} to ${figure(one.return_loss_high_db, 1)}`, figure(one.mismatch_loss_db, 2)].map((textContent) => make('td', { textContent })))))));
}

/** @param {any} cut */
function cutText(cut) {
  const at = cut.frequency_mhz === null ? 'At every frequency' : `At ${numberText(cut.frequency_mhz, 0)} MHz`;
  const rods = { horizontal: ', rods flat', vertical: ', rods upright' }[cut.polarisation] ?? '';
  if (cut.beamwidth_deg === null) return `${at}${rods}, lit with the other polarisation: ${cut.points} bearings.`;
  const beam = cut.beamwidth_deg === 360 ? 'round' : `${numberText(cut.beamwidth_deg, 0)}° between the half-power points`;
  return `${at}${rods}: ${beam}, ${numberText(cut.back_db, 0)} dB less to the back, ${cut.points} bearings.`;
}
