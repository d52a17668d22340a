/** Fetches what the open sheet needs, once for each answer: path, horizon, heights, ledger. */

import { latest } from './latest.js';
import { chainsAsked, columns, NOTHING, question, shownCell } from './state.js';

const PAUSE_MS = 400; // that a roof or an obstacle stands still before every height is tried: that takes the server seconds

/**
 * @param {any} api
 * @param {any} store
 * @returns {(state: import('./state.js').State) => void}
 */
export function createFollow(api, store) {
  const had = { path: '', skyline: '', heights: '', steps: '' };
  let pause = 0;
  /** The answer that the ledger was asked for: readings and what is on the air change it, too. @type {any} */
  let stepsOf = null;
  /** Answers at which a question failed: it is not put again before there is another. @type {Record<string, any>} */
  const failed = {};
  const asks = {
    path: latest((signal, query) => api.read('/api/path', query, signal)),
    skyline: latest((signal, query) => api.read('/api/skyline', query, signal)),
    heights: latest((signal, body) => api.post('/api/sweep', body, signal)),
    steps: latest((signal, body) => api.post('/api/assess', body, signal)),
  };

  /** @param {'path'|'skyline'|'heights'|'steps'} what @param {string} of @param {any} query @param {(found: any) => any} made */
  async function once(what, of, query, made) {
    const { answer } = store.get();
    const another = had[what] !== of;
    const newer = what === 'steps' && stepsOf !== answer;
    if (!(another || newer) || failed[what] === answer) return;
    had[what] = of;
    if (what === 'steps') stepsOf = answer;
    if (another && (what === 'skyline' || what === 'heights')) store.set({ [what]: null });
    try {
      const found = await asks[what](query);
      if (found) store.set({ [what]: made(found) });
    } catch (error) {
      if (had[what] === of) had[what] = '';
      failed[what] = answer;
      store.set({ trouble: { message: error.message, field: null } });
    }
  }

  return (state) => {
    const { answer, sheet } = state;
    clearTimeout(pause);
    if (!answer || state.asking) return;
    const { latitude_deg, longitude_deg, aerial_agl_m } = answer.roof;
    const place = JSON.stringify([latitude_deg, longitude_deg, aerial_agl_m]);
    const cell = shownCell(state);
    if (sheet === 'skyline' && columns(state).length) void once('skyline', place, { latitude_deg, longitude_deg, aerial_agl_m }, (found) => found);
    if (sheet === 'path' && cell) {
      const { emission } = cell;
      void once('path', JSON.stringify([emission.id, place]), {
        from_latitude_deg: emission.latitude_deg,
        from_longitude_deg: emission.longitude_deg,
        to_latitude_deg: latitude_deg,
        to_longitude_deg: longitude_deg,
        frequency_mhz: emission.frequency_mhz,
        antenna_agl_m: emission.antenna_agl_m,
        aerial_agl_m,
      }, (document) => ({ emission: emission.id, document }));
    }
    if (sheet === 'ledger' && cell) {
      void once('steps', JSON.stringify([cell.emission.id, question(state, aerial_agl_m)]), { ...question(state, aerial_agl_m), ledgers: [cell.emission.id] }, (found) => ({
        answer, emission: cell.emission.id, chains: found.emissions.find((one) => one.id === cell.emission.id)?.chains ?? {},
      }));
    }
    if (sheet === 'elsewhere' && columns(state).length) {
      const names = columns(state).map((one) => one.name).filter((name) => name !== NOTHING);
      const chains = chainsAsked(state).filter((one) => names.includes(one.name ?? one));
      const { worth_per_multiplex, reading_cost, readings, now, ...asked } = question(state, aerial_agl_m);
      const { aerial_agl_m: _, ...rest } = asked.roof;
      const kept = (state.chains ?? []).map((one) => one.updated); // and what is on the air: both may change under the same names
      const of = JSON.stringify([{ ...asked, roof: rest }, chains, kept, answer.emissions.map((one) => one.id)]);
      const ask = { ...asked, chains, roof: asked.roof };
      if (had.heights !== of) {
        if (state.heights) store.set({ heights: null });
        pause = window.setTimeout(() => void once('heights', of, ask, (found) => ({ rows: found.height })), PAUSE_MS);
      }
    }
  };
}
