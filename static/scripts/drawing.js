/**
 * The drawing of one path as shapes: ground with the Earth's bulge, the straight line, and the part of the
 * first Fresnel zone that the ground enters. The roof stands on the left. Pure: no page, no network.
 *
 * @typedef {object} Outline     transmitter first, as the server gives it
 * @property {number[]} distance_km
 * @property {number[]} ground_amsl_m
 * @property {number[]} [bare_amsl_m]     without houses and trees, where that is known
 * @property {number[]} bulge_m           of the Earth over the chord between the ends
 * @property {number[]} line_amsl_m       straight line from antenna to aerial
 * @property {number[]} first_fresnel_m   radius of the first zone
 * @property {boolean[]} water
 *
 * @typedef {{left: number, right: number, top: number, bottom: number}} Box
 */

const HEADROOM = 0.35; // of the zone's radius above the line, so that the line does not touch the upper edge

/**
 * @param {Outline} outline
 * @param {Box} box in drawing units, y down
 */
export function drawing(outline, box) {
  const points = outline.distance_km.map((km, place) => ({
    km,
    top: outline.ground_amsl_m[place] + outline.bulge_m[place],
    bare: outline.bare_amsl_m ? outline.bare_amsl_m[place] + outline.bulge_m[place] : null,
    line: outline.line_amsl_m[place],
    radius: outline.first_fresnel_m[place],
    water: outline.water[place],
  }));
  const [mast, roof] = [points[0], points[points.length - 1]];
  const length = roof.km;
  const high = Math.max(...points.map((one) => Math.max(one.top, one.line + HEADROOM * one.radius)));
  const low = Math.min(0, ...points.map((one) => one.top));
  const x = (km) => box.left + ((box.right - box.left) * (length - km)) / length;
  const y = (metres) => box.bottom - ((box.bottom - box.top) * (metres - low)) / (high - low || 1);
  const at = (one, metres) => `${x(one.km).toFixed(1)} ${y(metres).toFixed(1)}`;
  const along = (run, height) => run.map((one) => at(one, height(one))).join('L');
  return {
    ground: `M${along(points, (one) => one.top)}L${at(roof, low)}L${at(mast, low)}Z`,
    surface: `M${along(points, (one) => one.top)}`,
    water: runs(points, (one) => one.water).map((run) => `M${along(run, (one) => one.top)}`).join(''),
    taken: runs(points, (one) => one.top > one.line - one.radius && one.radius > 0)
      .map((run) => {
        const upper = along(run, (one) => Math.min(one.top, one.line + one.radius));
        return `M${upper}L${along([...run].reverse(), (one) => one.line - one.radius)}Z`;
      })
      .join(''),
    bare: points.some((one) => one.bare !== null && one.top - one.bare > 1) ? `M${along(points, (one) => one.bare ?? one.top)}` : '',
    line: `M${at(mast, mast.line)}L${at(roof, roof.line)}`,
    mast: `M${at(mast, mast.top)}L${at(mast, mast.line)}`,
    aerial: `M${at(roof, roof.top)}L${at(roof, roof.line)}`,
    x,
    y,
    heights: steps(low, high, 4),
    distances: steps(0, length, 7),
    length,
  };
}

/**
 * @param {Outline} outline
 * @param {number} km from the transmitter
 * @returns {{top: number, line: number}} ground with bulge and line at the nearest point
 */
export function pointAt(outline, km) {
  const away = outline.distance_km.map((one) => Math.abs(one - km));
  const place = away.indexOf(Math.min(...away));
  return { top: outline.ground_amsl_m[place] + outline.bulge_m[place], line: outline.line_amsl_m[place] };
}

/** @param {number} low @param {number} high @param {number} count @returns {number[]} about so many round values between */
export function steps(low, high, count) {
  const span = high - low;
  if (!(span > 0)) return [low];
  const rough = span / count;
  const unit = 10 ** Math.floor(Math.log10(rough));
  const step = unit * ([1, 2, 5].find((times) => times * unit >= rough * 0.999) ?? 10);
  const first = Math.ceil(low / step - 1e-9);
  const last = Math.floor(high / step + 1e-9);
  return Array.from({ length: last - first + 1 }, (_, place) => (first + place) * step);
}

/** @template T @param {T[]} points @param {(one: T) => boolean} belongs @returns {T[][]} stretches of at least two */
function runs(points, belongs) {
  /** @type {T[][]} */
  const found = [];
  let open = false;
  for (const one of points) {
    if (!belongs(one)) {
      open = false;
    } else if (open) {
      found[found.length - 1].push(one);
    } else {
      found.push([one]);
      open = true;
    }
  }
  return found.filter((run) => run.length > 1);
}
