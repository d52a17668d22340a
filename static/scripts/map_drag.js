/** Takes hold of the roof on the map and drags it; the chances follow while it moves. */

const GRASP = 16; // px round the roof in which a press takes hold of it
const STILL = 3; // px that a hand shakes

/**
 * @typedef {{x: number, y: number}} Point
 * @param {HTMLElement} view
 * @param {{roof: () => Point|null, busy: () => boolean, draw: () => void, drop: (at: Point) => void}} actions
 */
export function createDrag(view, { roof, busy, draw, drop }) {
  /** @type {Point|null} */
  let from = null;
  /** @type {Point|null} */
  let at = null;
  let dropped = false;

  /** @param {PointerEvent} event @returns {Point} inside the map */
  function point(event) {
    const frame = view.getBoundingClientRect();
    return {
      x: Math.min(frame.width, Math.max(0, event.clientX - frame.left)),
      y: Math.min(frame.height, Math.max(0, event.clientY - frame.top)),
    };
  }

  const far = () => from !== null && at !== null && Math.hypot(at.x - from.x, at.y - from.y) > STILL;

  view.addEventListener('pointerdown', (event) => {
    const [mine, press] = [roof(), point(event)];
    if (!mine || Math.hypot(mine.x - press.x, mine.y - press.y) > GRASP) return;
    event.stopPropagation();
    [from, at] = [mine, press];
    view.setPointerCapture(event.pointerId);
  }, true);
  for (const name of ['mousedown', 'touchstart']) view.addEventListener(name, (event) => { if (at) event.stopPropagation(); }, true);
  view.addEventListener('pointermove', (event) => {
    if (!at) return;
    event.stopPropagation();
    at = point(event);
    draw();
    if (far() && !busy()) drop(at);
  }, true);
  view.addEventListener('pointerup', (event) => {
    if (!at) return;
    event.stopPropagation();
    const [end, moved] = [at, far()];
    [from, at, dropped] = [null, null, true];
    if (moved) drop(end);
    draw();
  }, true);
  view.addEventListener('pointercancel', () => { [from, at] = [null, null]; draw(); }, true);
  // The press was the roof's: the map under it must not take it for a click of its own.
  view.addEventListener('click', (event) => { if (dropped) event.stopPropagation(); dropped = false; }, true);
  return {
    /** Where the roof is being dragged, null where it is not. */
    get at() {
      return at;
    },
  };
}
