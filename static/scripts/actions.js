/** What people do with what is kept: readings, chains, roofs, transmitters, other places. */

import { joined } from './air_list.js';
import { question } from './state.js';
import { parseHeight } from './units.js';

const ADDED_BY_STORE = new Set(['id', 'created', 'updated']);

/**
 * @param {any} api
 * @param {any} store
 * @param {() => Promise<void>} assess asks the main question anew
 */
export function createActions(api, store, assess) {
  const height = () => /** @type {any} */ (parseHeight(store.get().height, store.get().units)).height ?? 10;
  const encoded = encodeURIComponent;

  /** What another press or another window has taken away already is gone as it should be. @param {string} path */
  async function gone(path) {
    await api.remove(path).catch((error) => { if (error.status !== 404) throw error; });
  }

  async function chainsAgain() {
    const { chains } = await api.read('/api/chains');
    store.set({ chains });
  }

  async function roofsAgain() {
    const { roofs } = await api.read('/api/roofs');
    store.set({ kept: roofs });
  }

  /** The roof and what is asked of it, for a question about its chains. @param {string} why the roof is needed */
  function atRoof(why) {
    const { roof, settings, assumptions } = store.get();
    if (!roof) throw new Error(`Place the roof first: ${why}.`);
    const { worth_per_multiplex, reading_cost, ...asked } = settings;
    const { roof: whole } = question(store.get(), height());
    return { ...asked, roof: whole, ...(Object.keys(assumptions).length ? { assumptions } : {}) };
  }

  /** Takes a proposed chain as idea 1, under a name of its own; one that was taken before is shown again. @param {any} chain @param {string} stem */
  async function take(chain, stem) {
    const { chains, edits } = store.get();
    const same = edits.find((one) => one.title === chain.title && JSON.stringify(one.parts) === JSON.stringify(chain.parts));
    const taken = new Set([...(chains ?? []), ...edits].map((one) => one.name));
    let name = stem;
    for (let number = 2; taken.has(name); number += 1) name = `${stem}-${number}`;
    if (same) store.set({ idea: same.name, opened: same.name });
    else store.set({ edits: [...edits, { ...chain, name }], idea: name, opened: name });
    await assess();
  }

  /** Answers at the pinned places, one after the other. */
  async function comparePins() {
    const { pins } = store.get();
    const base = question(store.get(), height());
    const compared = pins.map(() => ({}));
    store.set({ compared });
    for (const [place, pin] of pins.entries()) {
      const { readings, ...asked } = base;
      const roof = { ...asked.roof, ...pin.where, aerial_agl_m: pin.height, obstacles: [] };
      let found;
      try {
        found = { answer: await api.post('/api/assess', { ...asked, roof, ledgers: [] }) };
      } catch (error) {
        found = { trouble: error.message };
      }
      if (store.get().pins !== pins) return;
      store.set({ compared: store.get().compared.map((one, each) => (each === place ? found : one)) });
    }
  }

  /** @param {any[]} pins */
  function setPins(pins) {
    store.set({ pins });
    void comparePins();
  }

  return {
    chainsAgain,
    roofsAgain,
    comparePins,

    /** Keeps a reading, asks anew and says what moved. @param {any} reading */
    async read(reading) {
      const { answer } = store.get();
      const done = await api.post('/api/readings', { latitude_deg: answer.roof.latitude_deg, longitude_deg: answer.roof.longitude_deg, reading });
      await assess();
      store.set({ moved: movedBetween(answer, store.get().answer) });
      return done;
    },
    /** @param {string} id */
    async forget(id) {
      await gone(`/api/readings/${encoded(id)}`);
      await assess();
    },
    /** A reading that surprised was looked at again. @param {any} item */
    async confirm(item) {
      const kept = await api.read(`/api/readings/${encoded(item.id)}`);
      await api.put(`/api/readings/${encoded(item.id)}`, { latitude_deg: kept.latitude_deg, longitude_deg: kept.longitude_deg, reading: { ...kept.reading, confirmed: true } });
      await assess();
    },
    logbook: () => api.read('/api/logbook').catch((error) => void store.set({ trouble: { message: error.message, field: null } })),

    /** @param {any} chain */
    async keepChain(chain) {
      const body = Object.fromEntries(Object.entries(chain).filter(([key]) => !ADDED_BY_STORE.has(key)));
      const there = (store.get().chains ?? []).find((one) => one.name === chain.name);
      await (there ? api.put(`/api/chains/${encoded(there.id)}`, body) : api.post('/api/chains', body));
      store.set({ edits: store.get().edits.filter((one) => one.name !== chain.name) });
      await chainsAgain();
      await assess();
    },
    /** @param {string} name */
    async removeChain(name) {
      await gone(`/api/chains/${encoded(name)}`);
      const { now, idea, second, edits } = store.get();
      store.set({ edits: edits.filter((one) => one.name !== name), now: now === name ? 'nothing' : now, idea: idea === name ? null : idea, second: second === name ? null : second });
      await chainsAgain();
      await assess();
    },
    /** @param {any} answers of a block of flats */
    async block(answers) {
      const made = await api.post('/api/block', { ...atRoof('what arrives there decides what the block needs'), ...answers });
      await take(made.chain, 'block');
      return made;
    },
    /** @param {any} wish */
    cheapest(wish) {
      const { chains, settings: { worth_per_multiplex } } = store.get();
      const more = { currency: chains?.[0]?.currency ?? 'EUR', ...(worth_per_multiplex === undefined ? {} : { worth_per_multiplex }) };
      return api.post('/api/cheapest', { ...atRoof('what arrives there decides which chain does'), ...wish, ...more });
    },
    /** @param {any} chain */
    take: (chain) => take(chain, 'cheapest'),
    /** @param {any} body */
    match: (body) => api.post('/api/match', { ...body, emissions: (store.get().answer?.emissions ?? []).slice(0, 1000).map((one) => one.id) }),
    /** @param {any} body */
    pattern: (body) => api.post('/api/pattern', body),

    /** @param {string} name @param {boolean} over whatever another window kept meanwhile */
    async keepRoof(name, over) {
      const state = store.get();
      const asked = question(state, height());
      const body = { ...asked, name, idea: state.idea, second: state.second, landmark: state.landmark };
      const { saved } = state;
      let done;
      if (saved) {
        const there = await api.read(`/api/roofs/${encoded(saved.id)}`).catch(() => null);
        if (there && there.updated !== saved.updated && !over) return 'changed elsewhere';
        done = there ? await api.put(`/api/roofs/${encoded(saved.id)}`, body) : await api.post('/api/roofs', body);
      } else {
        done = await api.post('/api/roofs', body);
      }
      store.set({ saved: { id: done.id, updated: done.updated } });
      await roofsAgain();
      return done;
    },
    /** @param {string} id */
    async forgetRoof(id) {
      await gone(`/api/roofs/${encoded(id)}`);
      if (store.get().saved?.id === id) store.set({ saved: null });
      await roofsAgain();
    },
    pin() {
      const { pins, roof, answer } = store.get();
      const letter = 'ABC'.split('').find((one) => !pins.some((each) => each.name === one)) ?? 'A';
      setPins([...pins, { name: letter, where: roof, height: answer.roof.aerial_agl_m }]);
    },
    /** @param {any} kept roof */
    compare(kept) {
      const { pins } = store.get();
      const where = { latitude_deg: kept.roof.latitude_deg, longitude_deg: kept.roof.longitude_deg };
      store.set({ sheet: 'elsewhere' });
      setPins([...pins.filter((one) => one.name !== kept.name), { name: kept.name, where, height: kept.roof.aerial_agl_m }].slice(-3));
    },
    /** @param {number} place */
    unpin: (place) => setPins(store.get().pins.filter((_, each) => each !== place)),

    /** The list of all channels, with names. */
    async air() {
      const [{ emissions }, { transmitters }, { multiplexes }] = await Promise.all(['emissions', 'transmitters', 'multiplexes'].map((one) => api.read(`/api/${one}`)));
      return joined(emissions, transmitters, multiplexes);
    },
    /** @param {string} id @param {boolean} on */
    async switchEmission(id, on) {
      await api.put(`/api/emissions/${encoded(id)}`, { on });
      if (store.get().answer) await assess();
    },
  };
}

/** What a reading moved by more than people notice, largest first. @param {any} before @param {any} after */
export function movedBetween(before, after) {
  const moves = [];
  for (const multiplex of after?.multiplexes ?? []) {
    const was = before?.multiplexes.find((one) => one.id === multiplex.id);
    const name = after.verdicts[0]?.candidate ?? Object.keys(multiplex.chains)[0];
    const pair = [was?.chains[name]?.chance, multiplex.chains[name]?.chance];
    if (pair.every((one) => one !== undefined) && Math.abs(pair[1] - pair[0]) >= 0.02) moves.push({ name: multiplex.name, before: pair[0], after: pair[1] });
  }
  return moves.sort((a, b) => Math.abs(b.after - b.before) - Math.abs(a.after - a.before));
}
