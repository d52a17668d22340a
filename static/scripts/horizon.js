/**
 * The skyline as shapes: the horizon all round unrolled into a strip from north to north, masts above or behind
 * it, and the curtain of the aerial's pattern. Pure: no page, no network.
 *
 * @typedef {{left: number, right: number, top: number, bottom: number}} Box
 */

const LEAST_SPAN_DEG = 2.5; // of elevation, so that a flat horizon looks flat
const DEAF_DB = 20; // where the curtain reaches the ground
const STEM = 16; // px that a mast stands out at least

/**
 * @param {any} skyline document
 * @param {Box} box drawing units, y down
 */
export function strip(skyline, box) {
  const angles = skyline.angle_deg.map((one) => (one === null ? null : one));
  const known = angles.filter((one) => one !== null);
  const antennas = skyline.transmitters.filter((one) => one.stands).map((one) => one.antenna_deg);
  const low = Math.min(0, ...known) - 0.3;
  const high = Math.max(low + LEAST_SPAN_DEG, ...known, ...antennas) + 0.4;
  const x = (bearing) => box.left + ((box.right - box.left) * bearing) / 360;
  const y = (degrees) => box.bottom - ((box.bottom - box.top) * (Math.max(low, degrees) - low)) / (high - low);
  const points = skyline.bearing_deg.map((bearing, place) => ({ bearing, angle: angles[place] }));
  if (points.length) points.push({ bearing: 360, angle: points[0].angle });
  const runs = known.length ? stretches(points) : [];
  const line = (run) => run.map((one) => `${x(one.bearing).toFixed(1)} ${y(one.angle).toFixed(1)}`).join('L');
  return {
    x,
    y,
    low,
    high,
    line: runs.map((run) => `M${line(run)}`).join(''),
    ground: runs.map((run) => `M${line(run)}L${x(run[run.length - 1].bearing)} ${box.bottom}L${x(run[0].bearing)} ${box.bottom}Z`).join(''),
    masts: skyline.transmitters.filter((one) => one.stands).map((one) => mast(one, x, y)),
    level: y(0),
  };
}

/** A mast from the ground it stands behind or on to its antenna, never shorter than can be seen. */
function mast(one, x, y) {
  const foot = y(one.horizon_deg);
  const tip = one.stands === 'above' ? Math.min(y(one.antenna_deg), foot - STEM) : Math.max(y(one.antenna_deg), foot + STEM / 2);
  return { ...one, x: x(one.bearing_deg), foot, tip };
}

/** @param {{bearing: number, angle: number|null}[]} points @returns {any[][]} without the gaps */
function stretches(points) {
  const found = /** @type {any[][]} */ ([]);
  let open = false;
  for (const one of points) {
    if (one.angle === null) open = false;
    else if (open) found[found.length - 1].push(one);
    else {
      found.push([one]);
      open = true;
    }
  }
  return found.filter((run) => run.length > 1);
}

/**
 * The curtain that hangs where the aerial is deaf, for an axis at north; it covers three turns, so that it can be slid.
 * @param {number[]} loss by degree off the axis
 * @param {Box} box
 * @returns {string}
 */
export function curtain(loss, box) {
  const unit = (box.right - box.left) / 360;
  const depth = box.bottom - box.top;
  const drop = (degree) => box.top + depth * Math.min(1, loss[((degree % 360) + 360) % 360] / DEAF_DB);
  let path = `M${(box.left - 360 * unit).toFixed(1)} ${box.top}`;
  for (let degree = -360; degree <= 720; degree += 2) path += `L${(box.left + degree * unit).toFixed(1)} ${drop(degree).toFixed(1)}`;
  return `${path}L${(box.left + 720 * unit).toFixed(1)} ${box.top}Z`;
}

/**
 * Rows for the names of masts so that none covers another; those that find no row have none.
 * @param {{x: number, width: number}[]} labels centres and widths
 * @param {number} rows @param {number} left @param {number} right
 * @returns {({row: number, x: number}|null)[]}
 */
export function places(labels, rows, left, right) {
  const taken = Array.from({ length: rows }, () => /** @type {number[][]} */ ([]));
  const order = labels.map((_, place) => place).sort((a, b) => labels[a].x - labels[b].x);
  const found = /** @type {({row: number, x: number}|null)[]} */ (labels.map(() => null));
  for (const place of order) {
    const { width } = labels[place];
    const x = Math.min(right - width / 2, Math.max(left + width / 2, labels[place].x));
    const row = taken.findIndex((row) => row.every(([from, to]) => x + width / 2 < from - 6 || x - width / 2 > to + 6));
    if (row < 0) continue;
    taken[row].push([x - width / 2, x + width / 2]);
    found[place] = { row, x };
  }
  return found;
}

/**
 * Chances of all multiplexes with the aerial turned to a whole degree, as the server swept them.
 * @param {any} answer @param {string} chain @param {number} degree
 * @returns {{id: string, name: string, chance: number}[]}
 */
export function chancesAt(answer, chain, degree) {
  const pointing = answer.chains[chain]?.pointings[0];
  if (!pointing) return [];
  const here = ((Math.round(degree) % 360) + 360) % 360;
  const best = here === Math.round(pointing.pointing_deg) % 360;
  return answer.multiplexes.map((multiplex) => ({
    id: multiplex.id,
    name: multiplex.name,
    chance: best ? multiplex.chains[chain].chance : (pointing.chance_percent_by_degree[multiplex.id]?.[here] ?? 0) / 100,
  }));
}

/** @param {number} chance @returns {string} its word */
export function gradeOf(chance) {
  return chance >= 0.95 ? 'secure' : chance >= 0.7 ? 'likely' : chance >= 0.3 ? 'open' : 'doubtful';
}
