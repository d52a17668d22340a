/** Why: the path of the shown cell as a sentence, a drawing and both methods' figures. */

import { drawing, pointAt } from './drawing.js';
import { shownCell } from './state.js';
import { shape } from './dom.js';
import { bearingText, distanceText, heightIn, heightText, numberText, told as inUnits } from './units.js';

/** @param {HTMLElement} element */
export function createPath(element) {
  const title = /** @type {HTMLElement} */ (element.querySelector('h3'));
  const told = /** @type {HTMLElement} */ (element.querySelector('.told'));
  const figure = /** @type {HTMLElement} */ (element.querySelector('figure'));
  const picture = /** @type {SVGElement} */ (element.querySelector('.drawing'));
  const caption = /** @type {HTMLElement} */ (element.querySelector('figcaption'));
  const facts = /** @type {HTMLElement} */ (element.querySelector('.facts'));
  const text = /** @type {SVGElement} */ (element.querySelector('#drawing-text'));
  const inside = /** @type {SVGElement} */ (element.querySelector('#drawing-inside rect'));
  const empty = /** @type {HTMLElement} */ (element.querySelector('.empty'));
  const body = /** @type {HTMLElement} */ (element.querySelector('.body'));
  const apart = /** @type {HTMLElement} */ (element.querySelector('.apart'));
  const fixed = [...picture.children];
  /** @type {import('./state.js').State} */
  let state;
  new ResizeObserver(() => state && update(state)).observe(figure);

  /** @param {import('./state.js').State} next */
  function update(next) {
    state = next;
    if (element.hidden) return;
    const cell = shownCell(state);
    empty.hidden = Boolean(cell);
    body.hidden = !cell;
    if (!cell) return;
    const { emission, multiplex } = cell;
    const channel = emission.channel ? `channel ${emission.channel}` : `${emission.frequency_mhz} MHz`;
    title.textContent = `${multiplex.name} on ${channel} from ${emission.transmitter_name}`;
    told.textContent = inUnits(emission.path?.sentence ?? emission.reason ?? '', state.units);
    apart.textContent = inUnits([emission.field.apart, emission.field.method_reason, ...(emission.cautions ?? [])].filter(Boolean).map(sentenced).join(' '), state.units);
    const path = state.path?.emission === emission.id ? state.path.document : null;
    figure.hidden = !path;
    if (path) draw(path, emission);
    facts.replaceChildren(...factsOf(emission, state.units).map(([name, value]) => {
      const pair = document.createElement('div');
      pair.append(
        Object.assign(document.createElement('dt'), { textContent: name }),
        Object.assign(document.createElement('dd'), { textContent: value }),
      );
      return pair;
    }));
  }

  /** @param {any} path @param {any} emission */
  function draw(path, emission) {
    const size = picture.getBoundingClientRect();
    if (size.width === 0) return;
    picture.setAttribute('viewBox', `0 0 ${size.width} ${size.height}`);
    const box = { left: 44, right: size.width - 8, top: 44, bottom: size.height - 34 };
    const shapes = drawing(path.drawing, box);
    const { x, y } = shapes;
    picture.replaceChildren(...fixed);
    for (const [key, value] of Object.entries({ x: box.left, y: 0, width: box.right - box.left, height: box.bottom })) {
      inside.setAttribute(key, String(value));
    }
    text.textContent = told.textContent;
    for (const height of shapes.heights) {
      add('path', { d: `M${box.left} ${y(height)}H${box.right}`, class: 'grid' });
      add('text', { x: box.left - 10, y: y(height) + 4, 'text-anchor': 'end', class: 'axis' }, numberText(heightIn(height, state.units), 0));
    }
    add('path', { d: shapes.ground, class: 'ground' });
    add('path', { d: shapes.taken, class: 'taken', 'clip-path': 'url(#drawing-inside)' });
    add('path', { d: shapes.surface, class: 'ground-line' });
    if (shapes.bare) add('path', { d: shapes.bare, class: 'bare' });
    for (const depth of [4, 8]) add('path', { d: shapes.water, class: 'water', transform: `translate(0 ${depth})` });
    add('path', { d: shapes.line, class: 'line' });
    add('path', { d: shapes.mast, class: 'end' });
    add('path', { d: shapes.aerial, class: 'end' });
    obstacles(path, shapes, emission);
    for (const km of shapes.distances) {
      add('text', { x: x(shapes.length - km), y: box.bottom + 22, 'text-anchor': 'middle', class: 'axis' }, numberText(state.units === 'imperial' ? km / 1.609344 : km, state.units === 'imperial' || km % 1 ? 1 : 0));
    }
    add('text', { x: box.left - 10, y: 14, 'text-anchor': 'end', class: 'axis' }, state.units === 'imperial' ? 'ft' : 'm');
    add('text', { x: box.left - 10, y: box.bottom + 22, 'text-anchor': 'end', class: 'axis' }, state.units === 'imperial' ? 'mi' : 'km');
    add('text', { x: box.left, y: 14, class: 'said' }, 'roof');
    add('text', { x: box.right, y: 14, 'text-anchor': 'end', class: 'said' }, emission.transmitter_name);
    tightest(path, shapes, box);
    caption.textContent =
      `Ground with the Earth’s curve${shapes.bare ? ', dotted where houses and trees are taken off,' : ','} the straight line to the mast, and filled: the part of the first Fresnel zone that the ground enters.`;
  }

  /** What the user entered near the roof, where it stands across this path. */
  function obstacles(path, { x, y, length }, emission) {
    for (const one of state.obstacles) {
      const half = (Math.atan2(one.width_m / 2, one.distance_m) * 180) / Math.PI;
      if (Math.abs(((one.bearing_deg - emission.bearing_deg + 540) % 360) - 180) > half) continue;
      const km = length - one.distance_m / 1000;
      const foot = path.drawing.ground_amsl_m[path.drawing.ground_amsl_m.length - 1];
      add('path', { d: `M${x(km)} ${y(foot)}V${y(foot + one.height_agl_m)}`, class: 'obstacle' });
    }
  }

  /** Names the point that decides, with the figures of the server. */
  function tightest(path, { x, y, length }, box) {
    const km = path.terms.worst_point_km;
    const into = path.terms.obstacle_into_line_m;
    const { top, line } = pointAt(path.drawing, km);
    const words = `${distanceText(length - km, state.units)}: ${heightText(Math.abs(into), state.units)} ${into > 0 ? 'into' : 'under'} the line`;
    const across = x(km);
    const half = 4 * words.length; // about half the width of the words
    const centre = Math.min(box.right - half, Math.max(box.left + half, across));
    add('path', { d: `M${across} 38V${Math.min(y(top), y(line)) - 3}`, class: 'leader' });
    add('text', { x: centre, y: 32, 'text-anchor': 'middle', class: 'said halo' }, words);
  }

  /** @param {string} name @param {Record<string, string|number>} attributes @param {string} [words] */
  function add(name, attributes, words) {
    picture.append(shape(name, attributes, words));
  }
  return { update };
}

/** @param {string} text @returns {string} as a sentence */
function sentenced(text) {
  const whole = text.charAt(0).toUpperCase() + text.slice(1);
  return /[.!?]$/.test(whole) ? whole : `${whole}.`;
}

/** @param {any} emission @param {import('./units.js').Units} units @returns {string[][]} name and figure */
function factsOf(emission, units) {
  const { field, path } = emission;
  const strength = (value) => (value === null ? 'not available' : `${numberText(value, 1)} dB(µV/m)`);
  return [
    ['Direction and distance', `${bearingText(emission.bearing_deg)}, ${distanceText(emission.distance_km, units)}`],
    ['In free space', strength(field.free_space_dbuv_m)],
    ['By Rec. ITU-R P.1546', strength(field.p1546_dbuv_m)],
    ['By Rec. ITU-R P.1812', strength(field.p1812_dbuv_m)],
    ...(path
      ? [
          ['Used here, give or take', `${strength(field.used_dbuv_m)} ± ${numberText(field.sigma_db, 1)}`],
          ['Fade on a bad night', `${numberText(field.fade_db, 1)} dB`],
        ]
      : []),
  ];
}
