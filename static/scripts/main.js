/** Starts the page: puts panels on the state, and asks the server when the state calls for it. */

import { createActions } from './actions.js';
import { createApi } from './api.js';
import { createAssumptions } from './assumptions.js';
import { createBill } from './bill.js';
import { createBlock } from './block.js';
import { createCautions } from './cautions.js';
import { placeOfTrouble } from './chain_edits.js';
import { createChains } from './chains.js';
import { createChanges } from './changes.js';
import { createCheapest } from './cheapest.js';
import { createDecision } from './decision.js';
import { createDownloads } from './downloads.js';
import { createFollow } from './follow.js';
import { createHere } from './here.js';
import { createElsewhere } from './elsewhere.js';
import { createHistory } from './history.js';
import { latest } from './latest.js';
import { createLedger } from './ledger.js';
import { createMap } from './map.js';
import { createMeasured } from './measured.js';
import { createPath } from './path.js';
import { createReadings } from './readings.js';
import { createRoofline } from './roofline.js';
import { createRoofs } from './roofs.js';
import { asOneFile, download } from './save.js';
import { createSeen } from './seen.js';
import { createSheets } from './sheets.js';
import { createSkyline } from './skyline.js';
import { chainNow, chainsHere, createStore, decode, encode, initialState, NOTHING, question } from './state.js';
import { createSteps } from './steps.js';
import { createTransmitters } from './transmitters.js';
import { heightIn, parseHeight, parsePlace, placeText, plainText } from './units.js';
import { createWhere } from './where.js';

const MEMORY = 'gainworth';
const UNITS = 'gainworth-units';
const api = createApi();
const store = createStore(initialState());
const past = createHistory();
const actions = createActions(api, store, assess);
const byId = (id) => /** @type {any} */ (document.getElementById(id));

const panels = [
  createWhere(byId('where'), { type, submit, choose, place }),
  createSeen(byId('seen'), { choose }),
  createDecision(byId('decision'), { visit, back }),
  createChanges(byId('changes'), { choose }),
  createRoofline(byId('roofline'), { type }),
  createBill(byId('bill')),
  createCautions(byId('cautions')),
  createSheets(byId('sheets'), { open: (sheet) => type({ sheet }) }),
  createSkyline(byId('skyline'), { aim }),
  createPath(byId('path')),
  createLedger(byId('ledger')),
  createElsewhere(byId('elsewhere'), { pin: actions.pin, unpin: actions.unpin, go, choose }),
  createReadings(byId('readings'), { read: actions.read, forget: told(actions.forget), confirm: told(actions.confirm), logbook: actions.logbook }),
  createChains(byId('chains'), { edit, drop, keep: actions.keepChain, remove: actions.removeChain, choose, show: (name) => store.set({ opened: name }) }),
  createCheapest(byId('cheapest'), { cheapest: actions.cheapest, take: actions.take }),
  createBlock(byId('block'), { block: actions.block }),
  createMeasured(byId('measured'), { match: actions.match, pattern: actions.pattern, edit }),
  createRoofs(byId('roofs'), { keep: actions.keepRoof, open, compare: actions.compare, forget: told(actions.forgetRoof), link, file }),
  createTransmitters(byId('transmitters'), { load: actions.air, turn: actions.switchEmission }),
  createAssumptions(byId('assumptions'), { choose, units }),
  createDownloads(byId('downloads'), api, { again: overNewGround }),
  createMap(byId('map'), { place }),
  createSteps(byId('again'), { back, forward }),
];
createHere(byId('where'), { place });

const askAssess = latest((signal, body) => api.post('/api/assess', body, signal));
const follow = createFollow(api, store);

/** Reads what was typed, and asks. */
async function assess() {
  const { where, height } = store.get();
  const at = await placed(where);
  if (where !== store.get().where) return;
  if ('problem' in at) {
    const doubt = at.swapped ? { question: 'Are latitude and longitude swapped?', swapped: at.swapped } : null;
    return void store.set({ trouble: { message: at.problem, field: 'where' }, doubt, asking: false });
  }
  const up = parseHeight(height, store.get().units);
  if ('problem' in up) return void store.set({ trouble: { message: up.problem, field: 'height' }, asking: false });
  store.set({ roof: at.place, asking: true, trouble: null });
  remember(true);
  const { chains } = question(store.get(), up.height);
  try {
    const answer = await askAssess({ ...question(store.get(), up.height), ledgers: [] });
    if (answer) store.set({ answer, asked: { where, height }, asking: false });
  } catch (error) {
    // A refused place has no answer; a server that is gone, or a slip in a chain, leaves the last one standing.
    const refused = error.status >= 400 && error.status < 500 && !/chain|part|reading|assumption/.test(error.field ?? error.code ?? '');
    const help = error.code === 'coverage' ? ' Under “Ground” below the page can fetch them.' : '';
    store.set({ answer: refused ? null : store.get().answer, asking: false, trouble: { message: error.message + help, field: error.field ?? null, at: placeOfTrouble(error.field, chains) } });
  }
}

/** Answers what was typed, and asks about it where latitude and longitude look swapped. */
async function submit() {
  const { where } = store.get();
  store.set({ doubt: null, notes: [] });
  await assess();
  if (where !== store.get().where || store.get().trouble?.field === 'where') return;
  const asked = await api.read('/api/position', { text: where.trim() }).catch(() => null);
  if (!asked?.question || where !== store.get().where) return;
  store.set({ doubt: { question: asked.question, swapped: { latitude_deg: asked.longitude_deg, longitude_deg: asked.latitude_deg } } });
}

/** Takes up what was fetched and answers the roof twice. */
async function overNewGround() {
  store.set({ health: await api.read('/api/health') });
  const seconds = [];
  for (const _ of [1, 2]) {
    const start = performance.now();
    await assess();
    if (store.get().trouble) return null;
    seconds.push((performance.now() - start) / 1e3);
  }
  return { first_s: seconds[0], second_s: seconds[1] };
}

/**
 * Degrees are read here; minutes and seconds, grids and codes by the server.
 * @param {string} text
 * @returns {Promise<{place: import('./state.js').Place} | {problem: string, swapped?: import('./state.js').Place}>}
 */
async function placed(text) {
  const at = parsePlace(text);
  const numbers = text.match(/[\d.]+/g)?.length ?? 0;
  const otherwise = numbers > 2 || (numbers > 0 && /[^\d\s.,;\u2212\u2013-]/.test(text));
  if (!('problem' in at) || !otherwise || at.problem.includes('not on Earth')) return at;
  try {
    const { latitude_deg, longitude_deg } = await api.read('/api/position', { text: text.trim() });
    return { place: { latitude_deg, longitude_deg } };
  } catch (error) {
    return { problem: error.message };
  }
}

/** @param {Partial<import('./state.js').State>} change what is being typed; kept even if it is never sent */
function type(change) {
  store.set(change);
  remember(false);
}

/** @param {import('./state.js').Place} at a place shown on the map */
function place(at) {
  store.set({ where: placeText(at), seen: {}, doubt: null, notes: [] });
  void assess();
}

/** @param {any} roof of the demo, with what is up there as long as that chain is kept */
function visit(roof) {
  if (chainsHere(store.get()).some((one) => one.name === roof.now)) store.set({ now: roof.now, idea: null, second: null });
  place(roof);
}

const NEW_ANSWER = ['now', 'around', 'seen', 'obstacles', 'settings', 'assumptions', 'edits'];

/** @param {Partial<import('./state.js').State>} change a choice; some need a new answer */
function choose(change) {
  store.set({ ...change, notes: [] });
  const { idea, second, now, where } = store.get();
  if ('now' in change) store.set({ idea: idea === now ? null : idea, second: second === now ? null : second, seen: {} });
  if (NEW_ANSWER.some((key) => key in change) && where) void assess();
  else remember(true);
}

/** @param {any} chain as changed here */
function edit(chain) {
  choose({ edits: [...store.get().edits.filter((one) => one.name !== chain.name), chain] });
}

/** @param {string} name of a chain whose changes are dropped */
function drop(name) {
  choose({ edits: store.get().edits.filter((one) => one.name !== name) });
}

/** Turns the aerial of a chain, or leaves it to be turned the best way. @param {string} name @param {number|null} degree */
function aim(name, degree) {
  const found = chainsHere(store.get()).find((one) => one.name === name);
  if (!found) return;
  const { id, created, updated, pointing_deg, ...rest } = found;
  edit(degree === null ? rest : { ...rest, pointing_deg: degree });
}

/** @param {any} pin a compared place to go to */
function go(pin) {
  store.set({ where: placeText(pin.where), height: plainText(heightIn(pin.height, store.get().units), 2) });
  void assess();
}

/** Opens a kept roof with everything that was asked for it. @param {any} kept */
function open(kept) {
  const { roof } = kept;
  const kinds = (kept.readings ?? []).filter((one) => one.kind === 'seen' && one.multiplex);
  const chosen = ['availability_percent', 'method', 'reach_km', 'worth_per_multiplex', 'reading_cost'];
  const usual = { availability_percent: 99, method: 'both', reach_km: 150, worth_per_multiplex: null, reading_cost: null };
  store.set({
    ...initialStateOfARoof(),
    where: placeText(roof),
    height: plainText(heightIn(roof.aerial_agl_m, store.get().units), 2),
    around: roof.surroundings ?? 'mapped',
    obstacles: roof.obstacles ?? [],
    now: kept.now ?? NOTHING, idea: kept.idea ?? null, second: kept.second ?? null, landmark: kept.landmark ?? '',
    edits: (kept.chains ?? []).filter((one) => typeof one === 'object'),
    assumptions: kept.assumptions ?? {},
    seen: Object.fromEntries(kinds.map((one) => [one.multiplex, one.state])),
    settings: Object.fromEntries(chosen.filter((key) => kept[key] !== undefined && kept[key] !== usual[key]).map((key) => [key, kept[key]])),
    saved: { id: kept.id, updated: kept.updated },
  });
  void assess();
}

function initialStateOfARoof() {
  const { cell, seen, landmark, obstacles, edits, settings, assumptions, moved } = initialState();
  return { cell, seen, landmark, obstacles, edits, settings, assumptions, moved };
}

/** Takes the last step back. */
function back() {
  stand(past.back());
}

/** Takes the step again that was taken back last. */
function forward() {
  stand(past.forward());
}

/** @param {string|null} kept as things are to stand */
function stand(kept) {
  if (kept === null) return;
  store.set({ ...decode(kept, store.get().units), past: past.steps, undone: past.undone });
  keep(kept);
  if (store.get().where) void assess();
}

/** @param {string} units heights are told in; what is typed changes with them */
function units(units) {
  const { height, units: before, asked } = store.get();
  const up = parseHeight(height, before);
  const typed = 'height' in up ? plainText(heightIn(up.height, /** @type {any} */ (units)), 1) : height;
  store.set({ units: /** @type {any} */ (units), height: typed, asked: asked && { where: asked.where, height: asked.height === height ? typed : asked.height } });
  try {
    localStorage.setItem(UNITS, units);
  } catch {
    // A browser may forbid storage: the choice holds until the page is left.
  }
}

async function link() {
  try {
    await navigator.clipboard.writeText(location.href);
    return true;
  } catch {
    return false;
  }
}

function file() {
  download(asOneFile(document), `gainworth ${store.get().where.replace(/[^\d.-]+/g, ' ').trim()}.html`);
}

/** Lets what goes wrong be said. @param {(...args: any[]) => Promise<void>} action */
function told(action) {
  return (...args) => action(...args).catch((error) => store.set({ trouble: { message: error.message, field: null } }));
}

/** Keeps what was typed and chosen for a link and for the next visit. @param {boolean} step whether it can be taken back */
function remember(step) {
  const kept = encode(store.get());
  if (step) {
    past.push(kept);
    if (store.get().past !== past.steps || store.get().undone !== past.undone) store.set({ past: past.steps, undone: past.undone });
  }
  keep(kept);
}

/** @param {string} kept */
function keep(kept) {
  history.replaceState(null, '', `#${kept}`);
  try {
    localStorage.setItem(MEMORY, kept);
  } catch {
    // A browser may forbid storage; the link still carries everything.
  }
}

function remembered() {
  if (location.hash.length > 1) {
    return { ...decode(location.hash, chosenUnits().units), ...chosenUnits() };
  }
  try {
    return { ...decode(localStorage.getItem(MEMORY) ?? '', chosenUnits().units), ...chosenUnits() };
  } catch {
    return {};
  }
}

/** @returns {{units?: import('./units.js').Units}} */
function chosenUnits() {
  try {
    return { units: localStorage.getItem(UNITS) === 'imperial' ? 'imperial' : 'metric' };
  } catch {
    return {};
  }
}

/** Asks what a link or the last visit asked; what it names and is not there is said. */
async function assessLink() {
  const { now, idea, second, cell, chains } = store.get();
  const say = (words) => store.set({ notes: [...store.get().notes, words] });
  if (chains) {
    const known = (name) => name === NOTHING || chainsHere(store.get()).some((chain) => chain.name === name);
    const kept = (name) => (name && known(name) ? name : null);
    store.set({ now: kept(now) ?? chainNow(chains), idea: kept(idea), second: kept(second) });
    for (const name of new Set([now, idea, second])) if (name && !known(name)) say(`No chain “${name}” is kept here: ${name === now ? 'look at “Up now”' : 'it is left out'}.`);
  }
  if (!store.get().where) return void store.set({ asking: false });
  await assess();
  const { answer } = store.get();
  if (cell && answer && !answer.multiplexes.some((one) => one.id === cell.multiplex)) say(`No multiplex “${cell.multiplex}” is in reach: the one that changes most is shown.`);
}

async function start() {
  store.set(/** @type {any} */ (remembered()));
  try {
    const [{ chains }, health, { cables }] = await Promise.all(['chains', 'health', 'cables'].map((one) => api.read(`/api/${one}`)));
    store.set({ chains, health, cables });
    showSources(health);
  } catch (error) {
    store.set({ trouble: { message: error.message, field: null } });
  }
  await assessLink();
  document.documentElement.dataset.ready = 'yes';
  void later();
}

/** What only sheets need, after the answer. */
async function later() {
  try {
    const [{ assumptions }] = await Promise.all([api.read('/api/assumptions'), actions.roofsAgain()]);
    store.set({ values: assumptions });
    if (store.get().pins.length) await actions.comparePins();
  } catch (error) {
    store.set({ trouble: { message: error.message, field: null } });
  }
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
  follow(state);
});
window.addEventListener('hashchange', () => {
  store.set({ ...initialStateOfARoof(), saved: null, ...decode(location.hash, store.get().units), asking: true }); // sheets wait for the new answer
  void assessLink();
  if (store.get().pins.length) void actions.comparePins();
});
for (const panel of panels) panel.update(store.get());
void start();
