/**
 * What the page knows, and what follows from it. Pure: no page, no network.
 *
 * @typedef {{latitude_deg: number, longitude_deg: number}} Place
 * @typedef {{multiplex: string, chain: string}} Cell
 * @typedef {object} State
 * @property {string} where        as typed
 * @property {string} height       as typed
 * @property {Place|null} roof     where the roof is, once it is known
 * @property {string} now          name of the chain that is up, or "nothing"
 * @property {string|null} idea    name of the chain to compare; null: the best one
 * @property {string|null} second  name of another chain to compare; null: none
 * @property {string} around       what stands around the roof: mapped, open, suburban, urban, trees
 * @property {Record<string, string>} seen   what works there today, by multiplex: perfect, breaks up, not found
 * @property {string} landmark     what lies along the line of the aerial, as named by the user
 * @property {any[]} obstacles     bearing_deg, distance_m, height_agl_m, width_m, leaves_m
 * @property {any[]} edits         chains as changed here, in place of kept ones of the same name
 * @property {Record<string, any>} settings     of the question, where not as usual
 * @property {Record<string, number>} assumptions  values changed from their defaults
 * @property {{name: string, where: Place, height: number}[]} pins  other places to compare
 * @property {string} sheet        the sheet that is open behind the answer
 * @property {import('./units.js').Units} units
 * @property {any|null} skyline    horizon of the answer's roof
 * @property {any|null} heights    chances against height
 * @property {any|null} steps      ledger of the shown cell
 * @property {any[]} compared      answers at the pinned places
 * @property {any[]} kept          kept roofs
 * @property {{id: string, updated: string}|null} saved  the kept roof that is open
 * @property {string} said         the last thing done, for a line of its own
 * @property {{name: string, before: number, after: number}[]} moved  what the last reading moved
 * @property {any[]} [values]      every value that was chosen, before there is an answer
 * @property {string[]} [cables]   classes of cable
 * @property {number} past         how many steps can be taken back
 * @property {number} undone       how many of them can be taken again
 * @property {string|null} opened  name of the chain that is open to be edited; null: the shown idea
 * @property {Cell|null} cell      the cell whose reasons are shown; null: the one that changes most
 * @property {any[]|null} chains   kept chains; null: not yet known
 * @property {any|null} health     what the server knows; null: not yet known
 * @property {any|null} answer     the document of the last answer
 * @property {any|null} path       the path of the shown cell
 * @property {{question: string, swapped: Place}|null} doubt  whether latitude and longitude are swapped
 * @property {boolean} asking      a question is on its way
 * @property {{message: string, field: string|null, at?: ReturnType<typeof import('./chain_edits.js').placeOfTrouble>}|null} trouble
 * @property {{where: string, height: string}|null} asked   as typed when the last answer came
 * @property {string[]} notes      what of a link was left out, until something is chosen
 */

import { isSheet, linkNotes, strangers, usable } from './link.js';
import { heightIn, parseHeight, plainText } from './units.js';

export const NOTHING = 'nothing';
export const MEASURING_AERIAL = 'measuring aerial'; // the chain of a reading where nothing is up
const VERSION = '2';
const MORE = /** @type {const} */ (['second', 'around', 'seen', 'landmark', 'obstacles', 'edits', 'settings', 'assumptions', 'pins']);
export const LEAST_CHANGE = 0.05; // of a chance or a number of multiplexes: less is the same to a person

/** @returns {State} */
export function initialState() {
  return {
    where: '', height: '10', roof: null, now: '', idea: null, second: null, cell: null,
    undone: 0, opened: null, around: 'mapped', seen: {}, landmark: '', obstacles: [], edits: [], settings: {}, assumptions: {}, pins: [],
    sheet: 'skyline', units: 'metric', skyline: null, heights: null, steps: null, compared: [], kept: [], saved: null,
    said: '', moved: [], past: 0,
    chains: null, health: null, answer: null, path: null, asking: false, trouble: null, doubt: null, asked: null, notes: [],
  };
}

/**
 * A value with listeners; each change is one object of fields.
 * @param {State} start
 */
export function createStore(start) {
  let state = start;
  /** @type {Set<(state: State, before: State) => void>} */
  const listeners = new Set();
  return {
    get: () => state,
    /** @param {Partial<State>} change */
    set(change) {
      const before = state;
      state = { ...state, ...change };
      for (const listener of listeners) listener(state, before);
    },
    /** @param {(state: State, before: State) => void} listener */
    subscribe(listener) {
      listeners.add(listener);
    },
  };
}

/** @param {State} state @returns {string} what a link or the next visit needs */
export function encode(state) {
  const kept = new URLSearchParams({ v: VERSION });
  const usual = initialState();
  if (state.where) kept.set('at', state.where);
  kept.set('height', state.units === 'imperial' && /\d\s*$/.test(state.height) ? `${state.height.trim()} ft` : state.height);
  if (state.now) kept.set('now', state.now);
  if (state.idea) kept.set('idea', state.idea);
  if (state.cell) {
    kept.set('multiplex', state.cell.multiplex);
    kept.set('chain', state.cell.chain);
  }
  if (state.sheet !== usual.sheet) kept.set('sheet', state.sheet);
  const more = Object.fromEntries(MORE.filter((key) => JSON.stringify(state[key]) !== JSON.stringify(usual[key])).map((key) => [key, state[key]]));
  if (Object.keys(more).length) kept.set('more', JSON.stringify(more));
  return kept.toString();
}

/**
 * What of a link can be used, whatever version it is of; `notes` say what was left out.
 * @param {string} text of encode, or anything else
 * @param {import('./units.js').Units} [units] heights are told in here; those of a link are metres unless it says feet
 * @returns {Partial<State>}
 */
export function decode(text, units = 'metric') {
  const kept = new URLSearchParams(text.replace(/^#/, ''));
  const version = kept.get('v');
  if (version === null && !kept.get('at')) return {};
  const multiplex = kept.get('multiplex');
  const chain = kept.get('chain');
  const sheet = kept.get('sheet') ?? 'skyline';
  const { values, dropped } = more(kept.get('more'));
  dropped.push(...strangers(kept), ...(isSheet(sheet) ? [] : [`sheet “${sheet}”`]));
  return {
    where: kept.get('at') ?? '',
    height: heightOf(kept.get('height') ?? '10', units),
    now: kept.get('now') ?? '',
    idea: kept.get('idea'),
    cell: multiplex && chain ? { multiplex, chain } : null,
    sheet: isSheet(sheet) ? sheet : 'skyline',
    ...values,
    notes: linkNotes(version ?? '', VERSION, dropped),
  };
}

/** @param {string} height of a link @param {import('./units.js').Units} units @returns {string} as it would be typed here */
function heightOf(height, units) {
  const bare = /\d\s*$/.test(height);
  if (bare && units === 'metric') return height;
  const up = parseHeight(height, 'metric');
  if ('height' in up) return plainText(heightIn(up.height, units), 1);
  return bare ? `${height} m` : height; // not possible, and not to be taken for feet
}

/** What a link holds beside the usual, each only if it has the shape it should have. @param {string|null} text */
function more(text) {
  const usual = initialState();
  const values = Object.fromEntries(MORE.map((key) => [key, usual[key]]));
  let found;
  try {
    found = Object(JSON.parse(text ?? '{}'));
  } catch {
    return { values, dropped: ['what follows “more”, which is cut off'] };
  }
  const dropped = Object.keys(found).filter((key) => !(/** @type {readonly string[]} */ (MORE).includes(key))).map((key) => `“${key}”`);
  for (const key of MORE) {
    if (!(key in found)) continue;
    const part = usable(key, found[key], usual[key]);
    values[key] = part.value;
    dropped.push(...part.dropped);
  }
  return { values, dropped };
}

/** Whether what is typed is no longer what was answered. @param {State} state */
export function isStale(state) {
  const { answer, asked, where, height } = state;
  return Boolean(answer && asked) && (asked?.where !== where || asked?.height !== height);
}

/**
 * The question for the server; what is as usual is left out.
 * @param {State} state @param {number} height metres @returns {any}
 */
export function question(state, height) {
  const now = state.now || NOTHING;
  const asked = /** @type {any} */ ({ roof: { ...state.roof, aerial_agl_m: height }, now, ...state.settings });
  if (state.around !== 'mapped') asked.roof.surroundings = state.around;
  if (state.obstacles.length) asked.roof.obstacles = state.obstacles;
  if (state.edits.length) asked.chains = chainsAsked(state);
  if (Object.keys(state.assumptions).length) asked.assumptions = state.assumptions;
  const seen = Object.entries(state.seen);
  if (seen.length && now !== NOTHING) asked.readings = seen.map(([multiplex, seenAs]) => ({ kind: 'seen', multiplex, state: seenAs, chain: now }));
  return asked;
}

/** Names of kept chains, and chains as changed here. @param {State} state @returns {any[]} */
export function chainsAsked(state) {
  const kept = (state.chains ?? []).map((one) => one.name);
  const drafts = new Map(state.edits.map((one) => [one.name, one]));
  return [...kept.map((name) => drafts.get(name) ?? name), ...state.edits.filter((one) => !kept.includes(one.name))];
}

/** Every chain as it stands here, kept or changed. @param {State} state @returns {any[]} */
export function chainsHere(state) {
  const drafts = new Map(state.edits.map((one) => [one.name, one]));
  const kept = (state.chains ?? []).map((one) => drafts.get(one.name) ?? one);
  return [...kept, ...state.edits.filter((one) => !kept.includes(one))];
}

/** The chains in columns: up now, idea 1, idea 2. @param {State} state @returns {{role: string, name: string}[]} */
export function columns(state) {
  const verdict = verdictOf(state);
  if (!verdict) return [];
  const second = state.second && state.second !== verdict.candidate && state.second !== verdict.baseline && state.answer.chains[state.second];
  return [
    { role: 'up now', name: verdict.baseline },
    { role: 'idea 1', name: verdict.candidate },
    ...(second ? [{ role: 'idea 2', name: /** @type {string} */ (state.second) }] : []),
  ];
}

/** @param {any[]} chains @returns {string} what is up as far as the kept chains say */
export function chainNow(chains) {
  return chains.find((chain) => chain.already_up)?.name ?? NOTHING;
}

/**
 * What a chain is called for people.
 * @param {State} state @param {string} name
 */
export function titleOf(state, name) {
  if (name === NOTHING) return 'nothing';
  return state.answer?.chains[name]?.title || chainsHere(state).find((one) => one.name === name)?.title || name;
}

/** @param {State} state @returns {any|null} the verdict on the shown idea */
export function verdictOf(state) {
  const verdicts = state.answer?.verdicts ?? [];
  return verdicts.find((one) => one.candidate === state.idea) ?? verdicts[0] ?? null;
}

/**
 * What one multiplex has through a chain; nothing where no aerial is up.
 * @param {any} multiplex @param {string} chain
 */
export function cellOf(multiplex, chain) {
  return multiplex.chains[chain] ?? null;
}

/** By how much a chain changes the chance of a multiplex. @param {any} multiplex @param {string} now @param {string} idea */
export function stepOf(multiplex, now, idea) {
  return (cellOf(multiplex, idea)?.chance ?? 0) - (cellOf(multiplex, now)?.chance ?? 0);
}

/** Whether a person would call two cells of a multiplex different. @param {any} multiplex @param {string} now @param {string} idea */
export function hasMoved(multiplex, now, idea) {
  const [before, after] = [cellOf(multiplex, now), cellOf(multiplex, idea)];
  return Math.abs(stepOf(multiplex, now, idea)) >= LEAST_CHANGE || (before !== null && before.grade !== after?.grade);
}

/**
 * Splits the multiplexes by whether an idea changes them; the largest change comes first.
 * @param {any} answer @param {string} now @param {...string} ideas
 * @returns {{changed: any[], same: any[]}}
 */
export function changes(answer, now, ...ideas) {
  const difference = (multiplex) => Math.max(...ideas.map((idea) => Math.abs(stepOf(multiplex, now, idea))));
  const moved = (multiplex) => ideas.some((idea) => hasMoved(multiplex, now, idea));
  const changed = answer.multiplexes.filter(moved);
  changed.sort((a, b) => difference(b) - difference(a));
  return { changed, same: answer.multiplexes.filter((multiplex) => !moved(multiplex)) };
}

/** Whether there are several ideas and none pays. @param {any} answer */
export function noneIsWorthIt(answer) {
  return (answer?.verdicts.length ?? 0) > 1 && answer.verdicts.every((one) => one.answer === 'not worth it');
}

/**
 * The chain for the rigger: the shown idea; what is up where no idea pays and none was asked for.
 * @param {State} state @returns {string}
 */
export function chainForTheRoof(state) {
  const verdict = verdictOf(state);
  if (!verdict) return NOTHING;
  const stays = state.idea === null && noneIsWorthIt(state.answer) && verdict.baseline !== NOTHING;
  return stays ? verdict.baseline : verdict.candidate;
}

/**
 * The cell whose reasons are shown: the chosen one if it is still there, else where the idea changes most.
 * @param {State} state
 * @returns {{multiplex: any, chain: string, emission: any, through: any}|null}
 */
export function shownCell(state) {
  const verdict = verdictOf(state);
  if (!state.answer || !verdict) return null;
  const chosen = state.answer.multiplexes.find((one) => one.id === state.cell?.multiplex);
  const shown = columns(state).map((one) => one.name);
  const { changed, same } = changes(state.answer, verdict.baseline, ...shown.slice(1));
  const multiplex = chosen ?? changed[0] ?? same[0];
  if (!multiplex) return null;
  const wish = chosen ? state.cell?.chain : verdict.candidate;
  const chain = shown.find((name) => name === wish && cellOf(multiplex, name)) ?? verdict.candidate;
  const emission = state.answer.emissions.find((one) => one.id === cellOf(multiplex, chain)?.emission);
  return emission ? { multiplex, chain, emission, through: emission.chains[chain] ?? null } : null;
}
