/** Starts the page: puts panels on the state, and asks the server when the state calls for it. */

import { createApi } from './api.js';
import { createCautions } from './cautions.js';
import { createChanges } from './changes.js';
import { createDecision } from './decision.js';
import { latest } from './latest.js';
import { createLedger } from './ledger.js';
import { createMap } from './map.js';
import { createPath } from './path.js';
import { createRoofline } from './roofline.js';
import { chainNow, createStore, decode, encode, initialState, NOTHING, question, shownCell } from './state.js';
import { parseHeight, parsePlace, placeText } from './units.js';
import { createWhere } from './where.js';

const MEMORY = 'gainworth';
const api = createApi();
const store = createStore(initialState());
const byId = (id) => /** @type {any} */ (document.getElementById(id));

const panels = [
  createWhere(byId('where'), { type, submit: assess, choose }),
  createDecision(byId('decision'), { place }),
  createChanges(byId('changes'), { choose }),
  createRoofline(byId('roofline')),
  createCautions(byId('cautions')),
  createPath(byId('path')),
  createLedger(byId('ledger')),
  createMap(byId('map'), { place }),
];

const askAssess = latest((signal, body) => api.assess(body, signal));
const askPath = latest((signal, query) => api.read('/api/path', query, signal));

/** Reads what was typed, and asks. */
async function assess() {
  const { where, height } = store.get();
  const at = parsePlace(where);
  if ('problem' in at) return void store.set({ trouble: { message: at.problem, field: 'where' } });
  const up = parseHeight(height);
  if ('problem' in up) return void store.set({ trouble: { message: up.problem, field: 'height' } });
  store.set({ roof: at.place, asking: true, trouble: null });
  remember();
  try {
    const answer = await askAssess(question(store.get(), up.height));
    if (answer) store.set({ answer, asking: false });
  } catch (error) {
    // A refused place has no answer; a server that is gone leaves the last one standing.
    const answer = error.status >= 400 && error.status < 500 ? null : store.get().answer;
    store.set({ answer, asking: false, trouble: { message: error.message, field: error.field ?? null } });
  }
}

/** @param {Partial<import('./state.js').State>} change what is being typed; kept even if it is never sent */
function type(change) {
  store.set(change);
  remember();
}

/** @param {import('./state.js').Place} at a place shown on the map */
function place(at) {
  store.set({ where: placeText(at) });
  void assess();
}

/** @param {Partial<import('./state.js').State>} change a choice; only another baseline needs a new answer */
function choose(change) {
  store.set(change);
  remember();
  if ('now' in change) {
    if (store.get().idea === change.now) store.set({ idea: null });
    if (store.get().where) void assess();
  }
}

/** Fetches the drawing of the shown path when it is another one. */
async function follow(state) {
  const emission = shownCell(state)?.emission;
  if (!emission || !state.answer) return;
  const of = JSON.stringify([emission.id, state.answer.roof]);
  if (follow.of === of) return;
  follow.of = of;
  try {
    const document = await askPath({
      from_latitude_deg: emission.latitude_deg,
      from_longitude_deg: emission.longitude_deg,
      to_latitude_deg: state.answer.roof.latitude_deg,
      to_longitude_deg: state.answer.roof.longitude_deg,
      frequency_mhz: emission.frequency_mhz,
      antenna_agl_m: emission.antenna_agl_m,
      aerial_agl_m: state.answer.roof.aerial_agl_m,
    });
    if (document) store.set({ path: { emission: emission.id, document } });
  } catch (error) {
    store.set({ path: null, trouble: { message: error.message, field: null } });
  }
}
follow.of = '';

/** Keeps what was typed and chosen for a link and for the next visit. */
function remember() {
  const kept = encode(store.get());
  history.replaceState(null, '', `#${kept}`);
  try {
    localStorage.setItem(MEMORY, kept);
  } catch {
    // A browser may forbid storage; the link still carries everything.
  }
}

function remembered() {
  if (location.hash.length > 1) return decode(location.hash);
  try {
    return decode(localStorage.getItem(MEMORY) ?? '');
  } catch {
    return {};
  }
}

async function start() {
  store.set(remembered());
  try {
    const [{ chains }, health] = await Promise.all([api.read('/api/chains'), api.read('/api/health')]);
    const known = (name) => name === NOTHING || chains.some((chain) => chain.name === name);
    const { now, idea } = store.get();
    store.set({ chains, health, now: known(now) ? now : chainNow(chains), idea: idea && known(idea) ? idea : null });
    showSources(health);
  } catch (error) {
    store.set({ trouble: { message: error.message, field: null } });
  }
  if (store.get().where) await assess();
  document.documentElement.dataset.ready = 'yes';
}

/** @param {any} health */
function showSources(health) {
  const sources = health.sources.map((one) => [one.name, one.attribution, one.licence].filter(Boolean).join(', '));
  const libraries = health.libraries.map((one) => `${one.file} (${one.licence})`);
  const words = document.querySelector('footer .sources');
  if (words) words.textContent = `Transmitters: ${sources.join('; ') || 'none'}. Libraries: ${libraries.join(', ')}. Gainworth ${health.version}.`;
}

store.subscribe((state) => {
  for (const panel of panels) panel.update(state);
  document.documentElement.dataset.asking = state.asking ? 'yes' : 'no';
  void follow(state);
});
window.addEventListener('hashchange', () => {
  store.set(decode(location.hash));
  if (store.get().where) void assess();
});
for (const panel of panels) panel.update(store.get());
void start();
