/**
 * The map: places the roof, shows the selected path, and carries the bearings of all masts on its frame.
 *
 * @typedef {object} MapOptions
 * @property {boolean} dark
 * @property {string} version       of the ground
 * @property {boolean} keepPixels   so that a picture of the page holds the map
 * @property {number[]|null} bounds west, south, east, north to begin with; null: the whole Earth
 * @property {() => void} onMove
 * @property {() => void} onIdle
 * @property {(latitude: number, longitude: number) => void} onClick
 *
 * @typedef {object} MapAdapter
 * @property {(latitude: number, longitude: number) => {x: number, y: number}} project
 * @property {(x: number, y: number) => import('./state.js').Place} unproject
 * @property {(latitude: number, longitude: number) => void} centre
 * @property {(bounds: number[], padding: number) => void} fit   west, south, east, north
 * @property {(x: number, y: number) => void} pan
 * @property {(steps: number) => void} zoom
 * @property {(on: boolean) => void} wheel
 * @property {(dark: boolean) => void} theme
 */

import { labelled, tickAt } from './bearings.js';
import { createDrag } from './map_drag.js';
import { shownCell } from './state.js';
import { bearingText, distanceText } from './units.js';

const SVG = 'http://www.w3.org/2000/svg';
const SIDE = 42; // px between the map and the outer line, left and right; as in map.css
const RIM = 30; // the same, above and below
const LEAST_SCALE = 60; // px of a tenth of a degree, below which a short path is looked at closer
const STEP = 10; // px a press of an arrow key moves the crosshair

/** @param {string} file */
function script(file) {
  return new Promise((ready, failed) => {
    const tag = Object.assign(document.createElement('script'), { src: `/vendor/${file}`, onload: ready, onerror: failed });
    document.head.append(tag);
  });
}

/** @param {string} file */
function stylesheet(file) {
  return new Promise((ready, failed) => {
    const tag = Object.assign(document.createElement('link'), { rel: 'stylesheet', href: `/vendor/${file}`, onload: ready, onerror: failed });
    document.head.prepend(tag); // before our own, so that ours wins
  });
}

function hasWebgl() {
  const context = document.createElement('canvas').getContext('webgl2');
  context?.getExtension('WEBGL_lose_context')?.loseContext();
  return context !== null;
}

/** @param {HTMLElement} element @param {MapOptions} options @returns {Promise<MapAdapter>} */
async function openAny(element, options) {
  if (hasWebgl()) {
    try {
      await Promise.all([script('maplibre-gl.js'), stylesheet('maplibre-gl.css')]);
      const adapter = await (await import('./map_maplibre.js')).open(element, options);
      document.documentElement.dataset.map = 'maplibre';
      return adapter;
    } catch {
      element.replaceChildren(); // WebGL is there but does not draw: the plain map follows
    }
  }
  await Promise.all([script('leaflet.js'), stylesheet('leaflet.css')]);
  const adapter = await (await import('./map_leaflet.js')).open(element, options);
  document.documentElement.dataset.map = 'leaflet';
  return adapter;
}

/**
 * @param {HTMLElement} element
 * @param {{place: (place: import('./state.js').Place) => void}} actions
 */
export function createMap(element, { place }) {
  const view = /** @type {HTMLElement} */ (element.querySelector('.view'));
  const overlay = /** @type {SVGSVGElement} */ (element.querySelector('.overlay'));
  const masts = element.querySelector('.masts');
  const credit = element.querySelector('.credit');
  const darkness = matchMedia('(prefers-color-scheme: dark)');
  /** @type {MapAdapter|null} */
  let adapter = null;
  let opening = false;
  /** @type {MapOptions} */
  let options;
  /** @type {{x: number, y: number}|null} */
  let crosshair = null;
  /** @type {import('./state.js').State} */
  let state;
  let shown = '';

  async function open() {
    opening = true;
    options = {
      dark: darkness.matches,
      version: state.health.ground.version,
      bounds: groundBounds(),
      keepPixels: navigator.webdriver,
      onMove: draw,
      onIdle: () => { element.dataset.idle = 'yes'; },
      onClick: (latitude, longitude) => place({ latitude_deg: latitude, longitude_deg: longitude }),
    };
    adapter = await openAny(view, options);
    darkness.addEventListener('change', () => adapter?.theme(darkness.matches));
    update(state);
  }

  /** Draws the relief of ground that has come since the map was opened. */
  function takeUpGround() {
    if (!adapter || options.version === state.health.ground.version) return;
    options.version = state.health.ground.version;
    adapter.theme(darkness.matches);
    const bounds = groundBounds();
    if (bounds) adapter.fit(bounds, 4);
  }

  /** What all rasters cover together. */
  function groundBounds() {
    const bounds = state.health.ground.rasters.map((raster) => raster.bounds_deg);
    if (bounds.length === 0) return null;
    return [0, 1, 2, 3].map((side) => (side < 2 ? Math.min : Math.max)(...bounds.map((one) => one[side])));
  }

  /** The emission of the shown path: its mast is the far end. */
  function mast() {
    return cell?.emission ?? null;
  }

  function look() {
    const { roof } = state;
    const far = state.asking ? null : mast(); // until the answer comes, the mast is that of the roof before
    const now = JSON.stringify([roof, far?.transmitter]);
    if (!adapter || !roof || drag.at || now === shown) return;
    shown = now;
    const ends = far ? [roof, far] : [roof];
    const inside = ends.every((end) => {
      const point = adapter?.project(end.latitude_deg, end.longitude_deg) ?? { x: -1, y: -1 };
      return point.x > 12 && point.y > 12 && point.x < view.clientWidth - 12 && point.y < view.clientHeight - 12;
    });
    if (inside && !(far && tooSmall(roof, far))) return;
    if (!far) {
      adapter.centre(roof.latitude_deg, roof.longitude_deg);
      return;
    }
    adapter.fit([
      Math.min(roof.longitude_deg, far.longitude_deg), Math.min(roof.latitude_deg, far.latitude_deg),
      Math.max(roof.longitude_deg, far.longitude_deg), Math.max(roof.latitude_deg, far.latitude_deg),
    ], 36);
  }

  /** Whether a path is a dot in a view of half the Earth. @param {import('./state.js').Place} roof @param {import('./state.js').Place} far */
  function tooSmall(roof, far) {
    const at = ({ latitude_deg, longitude_deg }) => /** @type {MapAdapter} */ (adapter).project(latitude_deg, longitude_deg);
    const apart = (one, other) => Math.hypot(one.x - other.x, one.y - other.y);
    const scale = apart(at(roof), at({ ...roof, latitude_deg: roof.latitude_deg + (roof.latitude_deg > 0 ? -0.1 : 0.1) }));
    return apart(at(roof), at(far)) < view.clientWidth / 6 && scale < LEAST_SCALE;
  }

  /** @param {string} name @param {Record<string, string|number>} attributes @param {string} [text] */
  function add(name, attributes, text) {
    const node = document.createElementNS(SVG, name);
    for (const [key, value] of Object.entries(attributes)) node.setAttribute(key, String(value));
    if (text !== undefined) node.textContent = text;
    overlay.append(node);
    return node;
  }

  function draw() {
    overlay.replaceChildren();
    const size = { width: view.clientWidth, height: view.clientHeight };
    overlay.setAttribute('viewBox', `${-SIDE} ${-RIM} ${size.width + 2 * SIDE} ${size.height + 2 * RIM}`);
    if (adapter && state.roof) {
      const roof = drag.at ?? adapter.project(state.roof.latitude_deg, state.roof.longitude_deg);
      drawPins();
      drawPath(roof);
      drawFrame(size, roof);
      add('path', { d: `M${roof.x} ${roof.y - 11}l11 18h-22Z`, class: 'roof' });
      add('circle', { cx: roof.x, cy: roof.y + 1.5, r: 2, class: 'roof-point' });
    }
    if (crosshair) {
      const { x, y } = crosshair;
      add('path', { d: `M${x} 0V${y - 8}M${x} ${y + 8}V${size.height}M0 ${y}H${x - 8}M${x + 8} ${y}H${size.width}`, class: 'crosshair' });
    }
  }

  function drawPins() {
    for (const pin of state.pins) {
      const at = adapter?.project(pin.where.latitude_deg, pin.where.longitude_deg);
      if (!at || at.x < 0 || at.y < 0 || at.x > view.clientWidth || at.y > view.clientHeight) continue;
      add('path', { d: `M${at.x} ${at.y - 9}l9 15h-18Z`, class: 'roof pinned' });
      add('text', { x: at.x, y: at.y - 13, 'text-anchor': 'middle', class: 'label pin-name' }, pin.name.slice(0, 12));
    }
  }

  /** @param {{x: number, y: number}} roof */
  function drawPath(roof) {
    const far = mast();
    if (!far || !adapter) return;
    const end = adapter.project(far.latitude_deg, far.longitude_deg);
    const clip = add('clipPath', { id: 'map-inside' });
    const box = document.createElementNS(SVG, 'rect');
    for (const [key, value] of Object.entries({ width: view.clientWidth, height: view.clientHeight })) box.setAttribute(key, String(value));
    clip.append(box);
    for (const layer of ['casing', 'line']) {
      add('path', { d: `M${roof.x} ${roof.y}L${end.x} ${end.y}`, class: `way ${layer}`, 'clip-path': 'url(#map-inside)' });
    }
    add('path', { d: `M${end.x - 5} ${end.y + 6}L${end.x} ${end.y - 12}L${end.x + 5} ${end.y + 6}M${end.x - 3.3} ${end.y}h6.6`, class: 'mast', 'clip-path': 'url(#map-inside)' });
  }

  /** @param {{width: number, height: number}} size @param {{x: number, y: number}} roof */
  function drawFrame(size, roof) {
    for (let bearing = 0; bearing < 360; bearing += 10) {
      const tick = tickAt(size, roof, bearing);
      if (tick) add('path', { d: outward(tick, bearing % 90 === 0 ? 9 : bearing % 30 === 0 ? 7 : 4), class: 'graduation' });
    }
    const chosen = cell?.emission.transmitter;
    const ticks = bearings().map((one) => ({ ...tickAt(size, roof, one.bearing), ...one, chosen: one.id === chosen }));
    const seen = ticks.filter((tick) => tick.side);
    const withLabel = labelled(seen, 30);
    for (const tick of seen) {
      add('path', { d: outward(tick, 12), class: tick.chosen ? 'tick chosen' : 'tick' });
      if (!withLabel.has(tick)) continue;
      const [x, y] = { top: [0, -16], bottom: [0, 24], left: [-15, 4], right: [15, 4] }[tick.side];
      const anchor = { top: 'middle', bottom: 'middle', left: 'end', right: 'start' }[tick.side];
      const inside = Math.min(size.width + SIDE, Math.max(-SIDE, tick.x + x));
      add('text', { x: inside, y: tick.y + y, 'text-anchor': anchor, class: tick.chosen ? 'label chosen' : 'label' }, bearingText(tick.bearing));
    }
  }

  /** @param {import('./bearings.js').Tick} tick @param {number} length */
  function outward(tick, length) {
    const way = { top: `v${-length}`, bottom: `v${length}`, left: `h${-length}`, right: `h${length}` }[tick.side];
    return `M${tick.x} ${tick.y}${way}`;
  }

  /** One entry for each mast in the answer, by bearing. */
  function bearings() {
    const byMast = new Map();
    for (const emission of state.answer?.emissions ?? []) {
      byMast.set(emission.transmitter, {
        id: emission.transmitter, name: emission.transmitter_name, bearing: emission.bearing_deg, distance: emission.distance_km,
      });
    }
    return [...byMast.values()].sort((a, b) => a.bearing - b.bearing);
  }

  function list() {
    const chosen = cell?.emission.transmitter;
    masts?.replaceChildren(...bearings().map((one) => {
      const item = document.createElement('li');
      const figure = Object.assign(document.createElement('b'), { textContent: bearingText(one.bearing) });
      item.append(figure, ` ${one.name}, ${distanceText(one.distance, state.units)}`);
      if (one.id === chosen) item.className = 'chosen';
      return item;
    }));
    const ground = state.health?.ground;
    const names = ground?.credits ?? [];
    const refused = (ground?.refused ?? []).map((one) => `${one.file}: ${one.message}`);
    const demo = state.health?.demo_roofs.length ? 'An invented island: no real place.' : '';
    if (credit) credit.textContent = [demo, names.length ? `Credits: ${names.join('; ')}.` : '', ...refused].filter(Boolean).join(' ');
  }

  /** @param {KeyboardEvent} event */
  function onKey(event) {
    if (!adapter || event.altKey || event.ctrlKey || event.metaKey) return;
    const step = event.shiftKey ? 5 * STEP : STEP;
    const way = { ArrowLeft: [-step, 0], ArrowRight: [step, 0], ArrowUp: [0, -step], ArrowDown: [0, step] }[event.key];
    if (way) {
      crosshair ??= start();
      move(crosshair.x + way[0], crosshair.y + way[1]);
    } else if (event.key === 'Enter' && crosshair) {
      const chosen = adapter.unproject(crosshair.x, crosshair.y);
      crosshair = null;
      place(chosen);
    } else if (event.key === 'Escape' && crosshair) {
      crosshair = null;
    } else if (event.key === '+' || event.key === '=' || event.key === '-') {
      adapter.zoom(event.key === '-' ? -1 : 1);
    } else {
      return;
    }
    event.preventDefault();
    draw();
  }

  function start() {
    const roof = state.roof && adapter?.project(state.roof.latitude_deg, state.roof.longitude_deg);
    const inside = roof && roof.x > 0 && roof.y > 0 && roof.x < view.clientWidth && roof.y < view.clientHeight;
    return inside ? { x: roof.x, y: roof.y } : { x: view.clientWidth / 2, y: view.clientHeight / 2 };
  }

  /** Moves the crosshair; at the rim the ground moves instead. @param {number} x @param {number} y */
  function move(x, y) {
    const rim = 30;
    const kept = {
      x: Math.min(view.clientWidth - rim, Math.max(rim, x)),
      y: Math.min(view.clientHeight - rim, Math.max(rim, y)),
    };
    if (kept.x !== x || kept.y !== y) adapter?.pan(x - kept.x, y - kept.y);
    crosshair = kept;
  }

  const drag = createDrag(view, {
    roof: () => (state?.roof && adapter ? adapter.project(state.roof.latitude_deg, state.roof.longitude_deg) : null),
    busy: () => state.asking,
    draw,
    drop: ({ x, y }) => adapter && place(adapter.unproject(x, y)),
  });
  view.addEventListener('keydown', onKey);
  view.addEventListener('focus', () => adapter?.wheel(true));
  view.addEventListener('blur', () => {
    adapter?.wheel(false);
    crosshair = null;
    draw();
  });
  element.querySelector('[name=in]')?.addEventListener('click', () => adapter?.zoom(1));
  element.querySelector('[name=out]')?.addEventListener('click', () => adapter?.zoom(-1));
  new ResizeObserver(() => draw()).observe(view);

  /** @type {any} what is shown, found once for each state */
  let cell = null;

  /** @param {import('./state.js').State} next */
  function update(next) {
    state = next;
    cell = shownCell(state);
    const settled = state.answer || (state.health && !state.asking && state.chains);
    if (settled && !opening) void open();
    takeUpGround();
    look();
    draw();
    list();
  }
  return { update };
}
