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
 * @property {Cell|null} cell      the cell whose reasons are shown; null: the one that changes most
 * @property {any[]|null} chains   kept chains; null: not yet known
 * @property {any|null} health     what the server knows; null: not yet known
 * @property {any|null} answer     the document of the last answer
 * @property {any|null} path       the path of the shown cell
 * @property {boolean} asking      a question is on its way
 * @property {{message: string, field: string|null}|null} trouble
 */

export const NOTHING = 'nothing';
const VERSION = '1';
const LEAST_CHANGE = 0.05; // a smaller difference of chance is the same to a person

/** @returns {State} */
export function initialState() {
  return {
    where: '', height: '10', roof: null, now: '', idea: null, cell: null,
    chains: null, health: null, answer: null, path: null, asking: false, trouble: null,
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
  if (state.where) kept.set('at', state.where);
  kept.set('height', state.height);
  if (state.now) kept.set('now', state.now);
  if (state.idea) kept.set('idea', state.idea);
  if (state.cell) {
    kept.set('multiplex', state.cell.multiplex);
    kept.set('chain', state.cell.chain);
  }
  return kept.toString();
}

/** @param {string} text of encode, or anything else @returns {Partial<State>} what of it can be used */
export function decode(text) {
  const kept = new URLSearchParams(text.replace(/^#/, ''));
  if (kept.get('v') !== VERSION) return {};
  const multiplex = kept.get('multiplex');
  const chain = kept.get('chain');
  return {
    where: kept.get('at') ?? '',
    height: kept.get('height') ?? '10',
    now: kept.get('now') ?? '',
    idea: kept.get('idea'),
    cell: multiplex && chain ? { multiplex, chain } : null,
  };
}

/** @param {State} state @param {number} height metres @returns {object} the question for the server */
export function question(state, height) {
  return { roof: { ...state.roof, aerial_agl_m: height }, now: state.now || NOTHING };
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
  return state.answer?.chains[name]?.title ?? state.chains?.find((one) => one.name === name)?.title ?? name;
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

/**
 * Splits the multiplexes by whether the idea changes them; the largest change comes first.
 * @param {any} answer @param {string} now @param {string} idea
 * @returns {{changed: any[], same: any[]}}
 */
export function changes(answer, now, idea) {
  const difference = (multiplex) => (cellOf(multiplex, idea)?.chance ?? 0) - (cellOf(multiplex, now)?.chance ?? 0);
  const moved = (multiplex) =>
    Math.abs(difference(multiplex)) >= LEAST_CHANGE ||
    (cellOf(multiplex, now) !== null && cellOf(multiplex, now).grade !== cellOf(multiplex, idea)?.grade);
  const changed = answer.multiplexes.filter(moved);
  changed.sort((a, b) => Math.abs(difference(b)) - Math.abs(difference(a)));
  return { changed, same: answer.multiplexes.filter((multiplex) => !moved(multiplex)) };
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
  const { changed, same } = changes(state.answer, verdict.baseline, verdict.candidate);
  const multiplex = chosen ?? changed[0] ?? same[0];
  if (!multiplex) return null;
  const shown = [verdict.baseline, verdict.candidate];
  const wish = chosen ? state.cell?.chain : verdict.candidate;
  const chain = shown.find((name) => name === wish && cellOf(multiplex, name)) ?? verdict.candidate;
  const emission = state.answer.emissions.find((one) => one.id === cellOf(multiplex, chain)?.emission);
  return emission ? { multiplex, chain, emission, through: emission.chains[chain] ?? null } : null;
}
