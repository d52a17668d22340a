/** The graduated frame of the map: where a bearing from the roof meets the edge. Pure. */

/**
 * @typedef {{x: number, y: number}} Point pixels, y down
 * @typedef {{x: number, y: number, side: 'top'|'right'|'bottom'|'left', bearing: number}} Tick
 */

/**
 * North is up and the map keeps angles, so a bearing is a straight line from the roof.
 * @param {{width: number, height: number}} frame
 * @param {Point} roof
 * @param {number} bearing degrees from north, clockwise
 * @returns {Tick|null} null where the roof is outside the frame
 */
export function tickAt(frame, roof, bearing) {
  if (roof.x <= 0 || roof.y <= 0 || roof.x >= frame.width || roof.y >= frame.height) return null;
  const east = Math.sin((bearing * Math.PI) / 180);
  const south = -Math.cos((bearing * Math.PI) / 180);
  const across = east > 0 ? (frame.width - roof.x) / east : east < 0 ? -roof.x / east : Infinity;
  const along = south > 0 ? (frame.height - roof.y) / south : south < 0 ? -roof.y / south : Infinity;
  const reach = Math.min(across, along);
  const side = across < along ? (east > 0 ? 'right' : 'left') : south > 0 ? 'bottom' : 'top';
  return { x: roof.x + east * reach, y: roof.y + south * reach, side, bearing };
}

/**
 * Ticks whose labels would run into one another lose all labels but the first; chosen ones keep theirs.
 * @template {Tick & {chosen?: boolean}} T
 * @param {T[]} ticks
 * @param {number} room pixels that a label needs
 * @returns {Set<T>} those that may carry a label
 */
export function labelled(ticks, room) {
  const order = [...ticks].sort((a, b) => Number(b.chosen ?? false) - Number(a.chosen ?? false) || a.bearing - b.bearing);
  /** @type {Set<T>} */
  const kept = new Set();
  for (const tick of order) {
    const crowded = [...kept].some((other) => Math.hypot(other.x - tick.x, other.y - tick.y) < room);
    if (!crowded) kept.add(tick);
  }
  return kept;
}
