/** Higher, lower or elsewhere: chance against height, and places on the plot side by side. */

import { button, field, make, part, refill, shape } from './dom.js';
import { chance } from './changes.js';
import { columns, shownCell, titleOf, verdictOf } from './state.js';
import { bearingText, chanceText, countText, heightIn, heightText, parseLength, parseNumber, placeText, plainText } from './units.js';

const MOST_PINS = 3;
const LINES = { 'up now': 'now', 'idea 1': 'first', 'idea 2': 'second' };

/**
 * @param {HTMLElement} element
 * @param {{pin: () => void, unpin: (place: number) => void, go: (pin: any) => void, choose: (change: object) => void}} actions
 */
export function createElsewhere(element, { pin, unpin, go, choose }) {
  const empty = part(element, '.empty');
  const body = part(element, '.body');
  const picture = part(element, '.rise');
  const table = part(element, '.by-height');
  const places = part(element, '.places');
  const pinned = part(element, '.pin');
  const near = part(element, '.obstacles');
  const problem = part(element, '.problem');
  /** @type {import('./state.js').State} */
  let state;
  pinned.addEventListener('click', pin);
  part(element, '.add-obstacle').addEventListener('click', () => choose({ obstacles: [...state.obstacles, { bearing_deg: 0, distance_m: 30, height_agl_m: 8, width_m: 10, leaves_m: 0 }] }));
  new ResizeObserver(() => { if (state && !element.hidden) draw(); }).observe(body);

  /** @param {import('./state.js').State} next */
  function update(next) {
    state = next;
    if (element.hidden) return;
    const ready = columns(state).length > 0;
    empty.hidden = ready;
    body.hidden = !ready;
    if (!ready) return;
    draw();
    sideBySide();
    obstacles();
  }

  function draw() {
    const rows = state.heights?.rows ?? [];
    part(element, '.waiting').hidden = rows.length > 0;
    picture.toggleAttribute('hidden', rows.length === 0);
    table.hidden = rows.length === 0;
    const width = picture.clientWidth;
    if (!rows.length || !width) return;
    const shown = columns(state).filter(({ name }) => rows[0].chains[name]);
    const cell = shownCell(state);
    const count = state.answer.multiplexes.length;
    const box = { left: 34, right: width - 10, top: 12, bottom: picture.clientHeight - 28 };
    const tall = rows[rows.length - 1].aerial_agl_m;
    const x = (metres) => box.left + ((box.right - box.left) * metres) / tall;
    const y = (value) => box.bottom - ((box.bottom - box.top) * value) / count;
    picture.setAttribute('viewBox', `0 0 ${width} ${picture.clientHeight}`);
    picture.replaceChildren(part(picture, 'title'));
    for (let value = 0; value <= count; value += Math.max(1, Math.ceil(count / 5))) {
      picture.append(shape('path', { d: `M${box.left} ${y(value)}H${box.right}`, class: 'grid' }), shape('text', { x: box.left - 8, y: y(value) + 4, 'text-anchor': 'end', class: 'axis' }, String(value)));
    }
    for (const { role, name } of shown) {
      picture.append(shape('path', { d: `M${rows.map((row) => `${x(row.aerial_agl_m).toFixed(1)} ${y(row.chains[name].expected_count).toFixed(1)}`).join('L')}`, class: `rise-line ${LINES[role]}` }));
    }
    const mine = state.answer.roof.aerial_agl_m;
    picture.append(shape('path', { d: `M${x(Math.min(mine, tall))} ${box.top}V${box.bottom}`, class: 'mine' }));
    for (const row of rows) picture.append(shape('text', { x: x(row.aerial_agl_m), y: box.bottom + 20, 'text-anchor': 'middle', class: 'axis' }, heightText(row.aerial_agl_m, state.units).replace(/\u00a0.*/, '')));
    part(table, 'caption').textContent = `Multiplexes to expect${cell ? `, and the chance of ${cell.multiplex.name},` : ''} at each height`;
    part(table, 'thead tr').replaceChildren(make('th', { scope: 'col', textContent: 'Height' }), ...shown.map(({ role, name }) => make('th', { scope: 'col' }, make('b', { textContent: role, className: LINES[role] }), ` ${titleOf(state, name)}`)));
    part(table, 'tbody').replaceChildren(...rows.map((row) => make('tr', {},
      make('th', { scope: 'row', textContent: heightText(row.aerial_agl_m, state.units) }),
      ...shown.map(({ name }) => {
        const chanceOf = cell ? row.chains[name].chance?.[cell.multiplex.id] : undefined;
        return make('td', {}, make('b', { textContent: countText(row.chains[name].expected_count) }), chanceOf === undefined ? '' : `, ${chanceText(chanceOf)}`);
      }))));
  }

  function sideBySide() {
    const verdict = verdictOf(state);
    pinned.disabled = state.pins.length >= MOST_PINS;
    const here = { name: 'here', where: state.roof, height: state.answer.roof.aerial_agl_m, answer: state.answer };
    const all = [here, ...state.pins.map((one, place) => ({ ...one, answer: state.compared[place]?.answer ?? null, trouble: state.compared[place]?.trouble }))];
    const names = [verdict.baseline, verdict.candidate];
    const ids = new Map(all.flatMap((one) => (one.answer?.multiplexes ?? []).map((each) => [each.id, each.name])));
    const head = make('tr', {}, make('td', {}), ...all.map((one, place) => make('th', { scope: 'col' },
      make('b', { textContent: one.name }), make('span', { textContent: one.where ? `${placeText(one.where)}, ${heightText(one.height, state.units)}` : '' }),
      ...(place ? [button('Go there', () => go(one), { 'aria-label': `Go to ${one.name}` }), button('Leave out', () => unpin(place - 1), { 'aria-label': `Leave out ${one.name}` })] : []))));
    const told = (one) => one.trouble ?? 'working it out …';
    const row = (label, words) => make('tr', {}, make('th', { scope: 'row', textContent: label }), ...all.map((one) => make('td', {}, one.answer ? words(one.answer) : told(one))));
    const rows = [
      ...names.filter((name) => name !== 'nothing').map((name) => row(titleOf(state, name), (answer) => {
        const chain = answer.chains[name];
        return chain ? `${countText(chain.expected_count)} of ${answer.multiplexes.length}${chain.pointings[0] ? `, at ${bearingText(chain.pointings[0].pointing_deg)}` : ''}` : 'not asked';
      })),
      row('Is it worth it?', (answer) => answer.verdicts.find((one) => one.candidate === verdict.candidate)?.answer ?? 'no answer'),
      ...[...ids].map(([id, name]) => row(name, (answer) => {
        const cell = answer.multiplexes.find((one) => one.id === id)?.chains[verdict.candidate];
        return cell ? chance(cell) : 'out of reach';
      })),
    ];
    places.hidden = state.pins.length === 0;
    refill(places, make('caption', { textContent: `Side by side, through ${titleOf(state, verdict.candidate)}` }), make('thead', {}, head), make('tbody', {}, ...rows));
  }

  function obstacles() {
    const unit = state.units === 'imperial' ? 'ft' : 'm';
    const [number, length] = [parseNumber, (text) => parseLength(text, state.units)];
    const boxed = (place, key, label, hint, read) => {
      const value = state.obstacles[place][key] ?? 0;
      return field(label, make('input', {
        type: 'text', inputMode: 'decimal', 'data-key': `${place}-${key}`,
        value: plainText(read === length ? heightIn(value, state.units) : value, 1),
        onchange: ({ target }) => {
          const found = read(target.value);
          target.toggleAttribute('aria-invalid', found === null);
          problem.textContent = found === null ? `“${target.value}” is not a number: write ${label.toLowerCase()} such as ${plainText(value, 0)}${read === length ? `, in ${unit}` : ''}.` : '';
          if (found !== null) choose({ obstacles: state.obstacles.map((one, each) => (each === place ? { ...one, [key]: found } : one)) });
        },
      }), hint);
    };
    const now = JSON.stringify([state.obstacles, unit]);
    if (near.dataset.drawn === now) return; // what is being typed stays
    near.dataset.drawn = now;
    problem.textContent = '';
    refill(near, ...state.obstacles.map((_, place) => make('li', {},
      boxed(place, 'bearing_deg', 'Direction', '° true', number), boxed(place, 'distance_m', 'Away', unit, length),
      boxed(place, 'height_agl_m', 'Height', unit, length), boxed(place, 'width_m', 'Width', unit, length),
      boxed(place, 'leaves_m', 'Leaves to pass', `${unit}, 0: a wall`, length),
      button('Take it away', () => choose({ obstacles: state.obstacles.filter((_, each) => each !== place) })))));
  }
  return { update };
}
