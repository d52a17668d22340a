/** Open tiles for the roof: said first, fetched once the user agrees to go online, then answered anew. */

import { make, part } from './dom.js';
import { latest } from './latest.js';
import { parseNumber } from './units.js';

const POLL_MS = 400;
const COME = new Set(['there', 'fetched', 'at sea']);

/**
 * @param {HTMLElement} element
 * @param {any} api
 * @param {{again: () => Promise<{first_s: number, second_s: number}|null>}} actions `again` takes up the new ground and answers twice
 */
export function createDownloads(element, api, { again }) {
  const form = /** @type {HTMLFormElement} */ (part(element, 'form'));
  const [holds, source, reach, agreed] = ['holds', 'source', 'reach', 'agreed'].map((name) => /** @type {any} */ (form.elements.namedItem(name)));
  const [plan, terms, consent, fetchIt, stop, way, problem, result, outcomes, timing] = [
    '.plan', '.terms', '.consent', '[type=submit]', '.stop', '.under-way', '.problem', '.result', '.outcomes', '.timing',
  ].map((one) => part(element, one));
  const askPlan = latest((signal, query) => api.read('/api/download-plan', query, signal));
  /** @type {any[]|null} */
  let sources = null;
  /** @type {import('./state.js').State} */
  let state;
  let planned = '';
  let watching = false;

  holds.addEventListener('change', () => { offerSources(); void say(); });
  source.addEventListener('change', () => void say());
  reach.addEventListener('change', () => void say());
  agreed.addEventListener('change', ready);
  form.addEventListener('submit', (event) => { event.preventDefault(); void start(); });
  stop.addEventListener('click', () => void tried(() => api.remove('/api/download')));

  /** @param {import('./state.js').State} next */
  function update(next) {
    state = next;
    if (element.hidden) return;
    have();
    form.hidden = state.roof === null;
    part(element, '.empty').hidden = state.roof !== null;
    if (sources === null) void open();
    else if (state.roof) void say();
  }

  /** Reads the sources, and takes up a download that was begun before. */
  async function open() {
    sources = [];
    await tried(async () => {
      sources = (await api.read('/api/tile-sources')).sources;
      offerSources();
      const found = await api.read('/api/download');
      if (found.state === 'running') void watch();
      else if (found.state !== 'none') show(found);
    });
    if (state.roof) await say();
  }

  function offerSources() {
    source.replaceChildren(...(sources ?? []).filter((one) => one.holds === holds.value).map((one) => make('option', { value: one.id, textContent: one.title })));
    reach.value = holds.value === 'cover' ? '50' : '150';
  }

  /** Which circle: asked of the server, which asks nobody. */
  function circle() {
    return { ...state.roof, holds: holds.value, source: source.value, reach_km: parseNumber(reach.value) };
  }

  /** Says how much it would be, once for each circle. */
  async function say() {
    if (!source.value || !state.roof) return;
    const asked = circle();
    const name = JSON.stringify(asked);
    if (name === planned) return;
    planned = name;
    agreed.checked = false;
    ready();
    if (asked.reach_km === null) return void (problem.textContent = 'Write how far round the roof as a number of kilometres, such as 150.');
    await tried(async () => {
      const found = await askPlan(asked);
      if (!found || name !== planned) return;
      const sea = found.at_sea ? `; ${found.at_sea} of them lie at sea and may not exist` : '';
      plan.textContent = found.to_fetch
        ? `${counted(found.tiles)}, ${found.there} of them here already; ${found.to_fetch} to fetch, about ${Math.max(1, Math.round(found.expected_mb))} MB${sea}.`
        : `${counted(found.tiles)}, all of them here already.`;
      terms.textContent = `${found.title}. Licence: ${found.licence}. ${found.attribution}`;
      consent.textContent = `Go online and ask ${found.hosts.join(', then ')}. Until then nothing leaves this machine.`;
      ready(found.to_fetch > 0);
    });
    if (problem.textContent) planned = '';
  }

  /** @param {boolean} [more] whether there is anything to fetch */
  function ready(more) {
    if (more !== undefined) agreed.disabled = !more;
    fetchIt.disabled = watching || agreed.disabled || !agreed.checked;
    stop.hidden = !watching;
  }

  async function start() {
    if (fetchIt.disabled) return;
    await tried(async () => {
      await api.post('/api/download', { ...circle(), agreed_to_go_online: true });
      [result, timing].forEach((one) => { one.textContent = ''; });
      outcomes.replaceChildren();
      await watch();
    });
  }

  /** Follows the download to its end; then the roof is answered anew. */
  async function watch() {
    if (watching) return;
    watching = true;
    ready();
    try {
      let found;
      for (;;) {
        found = await api.read('/api/download');
        way.hidden = false;
        part(way, 'progress').max = Math.max(1, found.tiles);
        part(way, 'progress').value = found.done;
        part(way, 'span').textContent = `${found.done} of ${found.tiles} tiles, ${found.fetched_mb.toFixed(1)} MB`;
        if (found.state !== 'running') break;
        await new Promise((done) => setTimeout(done, POLL_MS));
      }
      ended();
      await say();
      show(found);
      if (found.outcomes.some((one) => one.state === 'fetched')) await answered();
    } finally {
      ended();
    }
  }

  function ended() {
    watching = false;
    way.hidden = true;
    planned = '';
    ready();
  }

  /** @param {any} found how the download ended */
  function show(found) {
    const missed = found.outcomes.filter((one) => !COME.has(one.state));
    problem.textContent = found.error;
    const goOn = missed.length || found.error ? ' Fetch them again to go on: what has come is kept.' : '';
    result.textContent = `${found.state === 'stopped' ? 'Stopped. ' : ''}${found.summary.split('\n')[0]}${goOn}`;
    outcomes.replaceChildren(...found.outcomes.filter((one) => one.message).map((one) => make('li', { textContent: `${one.tile}: ${one.message}` })));
  }

  /** Tells how long the first answer over new ground takes, and the next one. */
  async function answered() {
    timing.textContent = 'Working it out over the new ground …';
    const took = await again();
    timing.textContent = took
      ? `The first answer over the new ground took ${took.first_s.toFixed(1)} s; the next one ${took.second_s.toFixed(1)} s.`
      : '';
  }

  /** @param {() => Promise<any>} action whatever goes wrong is said here */
  async function tried(action) {
    try {
      problem.textContent = '';
      await action();
    } catch (error) {
      problem.textContent = error.message;
    }
  }

  /** @param {number} tiles */
  function counted(tiles) {
    return tiles === 1 ? '1 tile' : `${tiles} tiles`;
  }

  function have() {
    const ground = state.health?.ground;
    if (!ground) return;
    const { rasters, cover } = ground;
    const finest = Math.min(...rasters.map((one) => one.spacing_m));
    const words = rasters.length ? `${rasters.length} ${rasters.length === 1 ? 'raster' : 'rasters'} of the ground, the finest with a height every ${Math.round(finest)} m` : 'No ground is known yet';
    part(element, '.have').textContent = `${words}; ${cover.length ? `${cover.length} of land cover` : 'no land cover'}.`;
    part(element, '.credits').replaceChildren(...ground.credits.map((textContent) => make('li', { textContent })));
  }
  return { update };
}
