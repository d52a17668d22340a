/** The skyline strip: the horizon all round, the masts, and the aerial's pattern that is slid along it. */

import { make, mark, part, shape } from './dom.js';
import { chancesAt, curtain, gradeOf, places, strip } from './horizon.js';
import { columns, titleOf } from './state.js';
import { bearingText, chanceText, compassBearing, countText, distanceText } from './units.js';

const NAME_ROWS = 3;
const ROW = 17; // px
const QUARTERS = [[0, 'N'], [90, 'E'], [180, 'S'], [270, 'W'], [360, 'N']];
const FAMILIAR = 60; // multiplexes drawn below the strip

/**
 * @param {HTMLElement} element
 * @param {{aim: (chain: string, degree: number|null) => void}} actions
 */
export function createSkyline(element, { aim }) {
  const chooser = part(element, '.through');
  const slider = part(element, '.slider');
  const picture = part(element, '.strip');
  const told = part(element, '.told');
  const chances = part(element, '.chances');
  const turn = part(element, '.turn');
  const free = part(element, '.free');
  const empty = part(element, '.empty');
  const body = part(element, '.body');
  /** @type {import('./state.js').State} */
  let state;
  /** @type {import('./horizon.js').Box|null} */
  let box;
  let chain = '';
  let degree = 0;
  let drawn = '';
  /** @type {any[]} */
  let cells = [];
  /** @type {any} */
  let moving = null;
  new ResizeObserver(() => { if (state) { drawn = ''; update(state); } }).observe(body);

  chooser.addEventListener('change', () => { chain = chooser.value; reset(); });
  slider.addEventListener('keydown', onKey);
  slider.addEventListener('pointerdown', (event) => {
    if (!box) return;
    slider.setPointerCapture(event.pointerId);
    slider.focus();
    slide(at(event));
    event.preventDefault();
  });
  slider.addEventListener('pointermove', (event) => { if (slider.hasPointerCapture(event.pointerId)) slide(at(event)); });
  turn.addEventListener('click', () => aim(chain, degree));
  free.addEventListener('click', () => aim(chain, null));

  /** @param {PointerEvent} event */
  function at(event) {
    const frame = slider.getBoundingClientRect();
    if (!box) return degree;
    const inside = Math.min(box.right, Math.max(box.left, event.clientX - frame.left));
    return Math.round((360 * (inside - box.left)) / (box.right - box.left));
  }

  /** @param {KeyboardEvent} event */
  function onKey(event) {
    const step = { ArrowLeft: -1, ArrowDown: -1, ArrowRight: 1, ArrowUp: 1, PageDown: -10, PageUp: 10 }[event.key];
    if (step) slide(degree + step * (event.shiftKey ? 10 : 1));
    else if (event.key === 'Home') slide(pointing()?.pointing_deg ?? 0);
    else if (event.key === 'Enter') aim(chain, degree);
    else return;
    event.preventDefault();
  }

  function pointing() {
    return state.answer?.chains[chain]?.pointings[0] ?? null;
  }

  function reset() {
    drawn = '';
    update(state);
  }

  /** @param {number} wanted turns the aerial; the chances follow at once */
  function slide(wanted) {
    const next = ((Math.round(wanted) % 360) + 360) % 360;
    if (next === degree && element.dataset.degree === String(next)) return;
    degree = next;
    show();
  }

  function show() {
    const one = pointing();
    if (!one || !box) return;
    const across = ((box.right - box.left) * degree) / 360;
    moving?.curtain.setAttribute('transform', `translate(${across} 0)`);
    moving?.axis.setAttribute('transform', `translate(${across} 0)`);
    const now = chancesAt(state.answer, chain, degree);
    const count = now.reduce((sum, each) => sum + each.chance, 0);
    const { declination } = state.answer.roof;
    const compass = declination ? `, ${bearingText(compassBearing(degree, declination))} by compass` : '';
    const words = `Turned to ${bearingText(degree)}${compass}: ${countText(count)} of ${now.length}.`;
    told.textContent = words;
    now.forEach((each, place) => {
      const cell = cells[place];
      if (!cell) return;
      const figure = chanceText(each.chance);
      if (cell.figure.textContent !== figure) cell.figure.textContent = figure;
      const grade = gradeOf(each.chance);
      if (cell.grade !== grade) {
        cell.grade = grade;
        cell.word.textContent = grade;
        cell.mark.querySelector('use').setAttribute('href', `#mark-${grade}`);
      }
    });
    slider.setAttribute('aria-valuenow', String(degree));
    slider.setAttribute('aria-valuetext', words);
    const best = Math.round(one.pointing_deg) % 360;
    turn.hidden = degree === best;
    turn.textContent = `Turn it to ${bearingText(degree)} and work it out`;
    element.dataset.degree = String(degree);
  }

  /** @param {import('./state.js').State} next */
  function update(next) {
    state = next;
    if (element.hidden) return;
    const shown = columns(state).filter((one) => state.answer.chains[one.name]?.pointings[0]);
    const ready = Boolean(shown.length && state.skyline);
    empty.hidden = ready;
    empty.textContent = state.answer ? (state.skyline === null ? 'Looking all round from this roof …' : 'No aerial to turn here.') : 'Place the roof first: its horizon is drawn here then.';
    body.hidden = !ready;
    if (!ready) return;
    if (!shown.some((one) => one.name === chain) || update.of !== state.answer) {
      const wish = shown.find((one) => one.name === chain) ?? shown.find((one) => one.role === 'idea 1') ?? shown[0];
      chain = wish.name;
      update.of = state.answer;
      degree = Math.round(pointing().pointing_deg) % 360;
      drawn = '';
    }
    const width = picture.clientWidth;
    const now = JSON.stringify([shown, chain, width, state.units, state.skyline.roof]);
    if (now === drawn || !width) return;
    drawn = now;
    chooser.replaceChildren(...shown.map(({ role, name }) => make('option', { value: name, textContent: `${role}: ${titleOf(state, name)}` })));
    chooser.value = chain;
    const draft = state.edits.find((one) => one.name === chain);
    free.hidden = draft?.pointing_deg === undefined || draft.pointing_deg === null;
    draw(width);
    list();
    show();
  }
  update.of = /** @type {any} */ (null);

  /** @param {number} width */
  function draw(width) {
    const height = picture.clientHeight;
    picture.setAttribute('viewBox', `0 0 ${width} ${height}`);
    box = { left: 6, right: width - 6, top: NAME_ROWS * ROW + 10, bottom: height - 24 };
    const shapes = strip(state.skyline, box);
    const sky = shape('g', { 'clip-path': 'url(#skyline-inside)' });
    part(picture, '#skyline-inside rect').replaceWith(shape('rect', { x: box.left, y: box.top, width: box.right - box.left, height: box.bottom - box.top }));
    const hung = shape('path', { d: curtain(pointing().pattern_loss_db_by_degree, box), class: 'curtain' });
    const axis = shape('g', { class: 'axis-line' });
    for (const turn of [-1, 0, 1]) {
      const x = box.left + turn * (box.right - box.left);
      axis.append(shape('path', { d: `M${x} ${box.top}V${box.bottom}`, class: 'axis' }), shape('path', { d: `M${x - 6} ${box.top}h12l-6 9Z`, class: 'handle' }));
    }
    moving = { curtain: hung, axis };
    sky.append(hung);
    for (const mast of shapes.masts) if (mast.stands === 'behind') sky.append(...standing(mast));
    sky.append(shape('path', { d: shapes.ground, class: 'ground' }), shape('path', { d: shapes.line, class: 'ground-line' }));
    for (const mast of shapes.masts) sky.append(...standing(mast));
    sky.append(axis);
    picture.replaceChildren(part(picture, 'title'), part(picture, 'desc'), part(picture, 'defs'), sky, shape('rect', { x: box.left, y: box.top, width: box.right - box.left, height: box.bottom - box.top, class: 'frame' }));
    for (const [bearing, letter] of QUARTERS) {
      picture.append(shape('path', { d: `M${shapes.x(bearing)} ${box.bottom}v6`, class: 'tick' }));
      picture.append(shape('text', { x: Math.min(box.right - 4, Math.max(box.left + 4, Number(shapes.x(bearing)))), y: box.bottom + 20, 'text-anchor': bearing === 0 ? 'start' : bearing === 360 ? 'end' : 'middle', class: 'axis-name' }, String(letter)));
    }
    for (let bearing = 30; bearing < 360; bearing += 30) if (bearing % 90) picture.append(shape('path', { d: `M${shapes.x(bearing)} ${box.bottom}v4`, class: 'tick' }));
    names(shapes.masts);
    part(picture, 'desc').textContent = shapes.masts.map((mast) => `${mast.name} at ${bearingText(mast.bearing_deg)} stands ${mast.stands} the horizon`).join('; ');
  }

  /** @param {any} mast */
  function standing(mast) {
    const behind = mast.stands === 'behind';
    return [
      shape('path', { d: `M${mast.x} ${mast.foot}V${mast.tip}`, class: behind ? 'mast behind' : 'mast' }),
      shape('circle', { cx: mast.x, cy: mast.tip, r: 3.5, class: behind ? 'tip behind' : 'tip' }),
    ];
  }

  /** @param {any[]} masts */
  function names(masts) {
    if (!box) return;
    const texts = masts.map((one) => `${one.name} ${distanceText(one.distance_km, state.units)}${one.stands === 'behind' ? ', behind' : ''}`);
    const found = places(masts.map((one, place) => ({ x: one.x, width: 7.1 * texts[place].length })), NAME_ROWS, box.left, box.right);
    masts.forEach((one, place) => {
      const spot = found[place];
      if (!spot) return;
      const y = 13 + spot.row * ROW;
      picture.append(shape('path', { d: `M${one.x} ${y + 4}V${Math.min(one.tip, one.foot) - 5}`, class: 'leader' }));
      picture.append(shape('text', { x: spot.x, y, 'text-anchor': 'middle', class: 'name' }, texts[place]));
    });
  }

  function list() {
    const all = state.answer.multiplexes;
    cells = all.slice(0, FAMILIAR).map((one) => {
      const figure = make('b');
      const word = make('span', { className: 'word' });
      const sign = mark('open');
      return { figure, word, mark: sign, grade: '', row: make('li', {}, make('span', { className: 'name', textContent: one.name }), figure, make('span', { className: 'grade' }, sign, word)) };
    });
    chances.replaceChildren(...cells.map((one) => one.row));
  }
  return { update };
}
