/** Numbers as people read and type them. Pure: no page, no network. */

const MINUS = '\u2212';

/**
 * A chance in words a customer can weigh. Never certain: the ends are told as one in a hundred.
 * @param {number} chance 0 to 1
 * @returns {string} for instance "9 in 10"
 */
export function chanceText(chance) {
  if (chance >= 0.99) return '99 in 100';
  if (chance >= 0.95) return '19 in 20';
  if (chance <= 0.01) return '1 in 100';
  if (chance < 0.075) return '1 in 20';
  return `${Math.min(9, Math.max(1, Math.round(chance * 10)))} in 10`;
}

/**
 * A count that is itself uncertain.
 * @param {number} count 0 or more
 * @returns {string} "none", "less than 1", "about 2", "2 to 3"
 */
export function countText(count) {
  if (count < 0.05) return 'none';
  if (count < 0.75) return 'less than 1';
  const whole = Math.round(count);
  if (Math.abs(count - whole) <= 0.25) return `about ${whole}`;
  return `${Math.floor(count)} to ${Math.ceil(count)}`;
}

/**
 * @param {number} value
 * @param {string|null|undefined} currency a code, a word or nothing
 * @returns {string} whole units, "90" or "90 EUR"
 */
export function moneyText(value, currency) {
  const amount = numberText(Math.round(value), 0);
  return currency ? `${amount}\u00a0${currency}` : amount;
}

/**
 * @param {number} value
 * @param {number} digits after the point
 * @returns {string} with a true minus sign; "0", never "-0"
 */
export function numberText(value, digits) {
  const text = Math.abs(value).toFixed(digits);
  return value < 0 && Number(text) !== 0 ? MINUS + text : text;
}

/** @param {number} value decibels, told with its sign @param {number} [digits] @returns {string} */
export function signedText(value, digits = 1) {
  const text = numberText(value, digits);
  return text.startsWith(MINUS) || Number(text) === 0 ? text : `+${text}`;
}

/** @param {number} bearing degrees @returns {string} whole degrees from north, "008°" */
export function bearingText(bearing) {
  const whole = ((Math.round(bearing) % 360) + 360) % 360;
  return `${String(whole).padStart(3, '0')}°`;
}

/** @param {number} km @returns {string} */
export function distanceText(km) {
  return km < 10 ? `${km.toFixed(1)}\u00a0km` : `${Math.round(km)}\u00a0km`;
}

/** @param {string} text @returns {string} with no line break between a number and its unit */
export function unbroken(text) {
  return text.replace(/(\d) (?=(k?m|dB|MHz|%)(\W|$))/g, '$1\u00a0');
}

/** @param {string} polarisation @returns {string} how the rods of the aerial lie */
export function rodsText(polarisation) {
  return { horizontal: 'rods flat', vertical: 'rods upright' }[polarisation] ?? 'rods either way';
}

/** @param {{latitude_deg: number, longitude_deg: number}} place @returns {string} as it can be typed */
export function placeText(place) {
  return `${place.latitude_deg.toFixed(5)}, ${place.longitude_deg.toFixed(5)}`;
}

/**
 * Reads a position: "51.5, -3.1", "51.5 N 3.1 W", "51,5; -3,1".
 * @param {string} text
 * @returns {{place: {latitude_deg: number, longitude_deg: number}} | {problem: string}}
 */
export function parsePlace(text) {
  const example = 'write it as latitude, longitude in degrees, such as 12.345, -6.789';
  const tidy = text.trim().replace(/[\u2212\u2013]/g, '-').replace(/°/g, ' ');
  if (!tidy) return { problem: `The position is empty: ${example}.` };
  const number = /(\d),(\d)(?=[^,]*[;\s])/.test(tidy) && !/,\s/.test(tidy) && !/\./.test(tidy)
    ? tidy.replace(/(\d),(\d)/g, '$1.$2')
    : tidy;
  const match = /^([+-]?\d+(?:\.\d*)?|[+-]?\.\d+)\s*([NS])?\s*[,;\s]\s*([+-]?\d+(?:\.\d*)?|[+-]?\.\d+)\s*([EW])?$/i.exec(number);
  if (!match) return { problem: `“${text.trim()}” is not a position: ${example}.` };
  const [, first, northSouth, second, eastWest] = match;
  const latitude = Number(first) * (northSouth?.toUpperCase() === 'S' ? -1 : 1);
  const longitude = Number(second) * (eastWest?.toUpperCase() === 'W' ? -1 : 1);
  if (Math.abs(latitude) > 90) return { problem: `Latitude ${latitude} is not on Earth: use ${MINUS}90 to 90.` };
  if (Math.abs(longitude) > 180) return { problem: `Longitude ${longitude} is not on Earth: use ${MINUS}180 to 180.` };
  return { place: { latitude_deg: latitude, longitude_deg: longitude } };
}

/**
 * Reads the height of the aerial above the ground.
 * @param {string} text
 * @returns {{height: number} | {problem: string}}
 */
export function parseHeight(text) {
  const tidy = text.trim().replace(',', '.').replace(/\s*m$/i, '');
  if (!/^\d+(\.\d+)?$/.test(tidy)) return { problem: 'Write the height in metres, such as 10.' };
  return { height: Number(tidy) };
}
