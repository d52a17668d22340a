/** Numbers as people read and type them. Pure: no page, no network. */

const MINUS = '\u2212';
const FEET_PER_M = 1 / 0.3048; // the international foot, exactly
const MILES_PER_KM = 1 / 1.609344;
/** @type {Map<number, Intl.NumberFormat>} */
const formats = new Map();

const HEIGHTS_M = [1, 200]; // above the ground; as the server allows
const DECIMAL = new Intl.NumberFormat().formatToParts(1.5).find((one) => one.type === 'decimal')?.value ?? '.';

/** @typedef {'metric'|'imperial'} Units of heights and distances */

/**
 * A chance in words a customer can weigh. Never certain: the ends are told as one in a hundred. Never on the
 * wrong side of a grade: just below where the words open and likely begin, a tenth would say more than the word.
 * @param {number} chance 0 to 1
 * @returns {string} for instance "9 in 10"
 */
export function chanceText(chance) {
  if (chance >= 0.99) return '99 in 100';
  if (chance >= 0.95) return '19 in 20';
  if (chance <= 0.01) return '1 in 100';
  if (chance < 0.075) return '1 in 20';
  if (chance >= 0.25 && chance < 0.3) return '1 in 4';
  if (chance >= 0.65 && chance < 0.7) return '2 in 3';
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
 * @returns {string} as the reader's locale writes it, with a true minus sign; "0", never "-0"
 */
export function numberText(value, digits) {
  let format = formats.get(digits);
  if (!format) {
    format = new Intl.NumberFormat(undefined, { minimumFractionDigits: digits, maximumFractionDigits: digits, useGrouping: false });
    formats.set(digits, format);
  }
  const text = format.format(Math.abs(value));
  return value < 0 && Number(Math.abs(value).toFixed(digits)) !== 0 ? MINUS + text : text;
}

/** @param {number} value @param {number} most digits after the point @returns {string} without zeros at the end, as it can be typed */
export function plainText(value, most) {
  return numberText(value, [...Array(most).keys()].find((digits) => Math.abs(Number(value.toFixed(digits)) - value) < 0.5 * 10 ** -most) ?? most);
}

/** @param {string} day year-month-day @returns {string} as the reader's locale writes it, the month by name */
export function dayText(day) {
  return new Date(`${day}T12:00`).toLocaleDateString(undefined, { dateStyle: 'medium' });
}

/** @param {number} value decibels, told with its sign @param {number} [digits] @returns {string} */
export function signedText(value, digits = 1) {
  const text = numberText(value, digits);
  return text.startsWith(MINUS) || Number(value.toFixed(digits)) === 0 ? text : `+${text}`;
}

/** @param {number} bearing degrees @returns {string} whole degrees from north, "008°" */
export function bearingText(bearing) {
  const whole = ((Math.round(bearing) % 360) + 360) % 360;
  return `${String(whole).padStart(3, '0')}°`;
}

/** @param {number} km @param {Units} [units] @returns {string} */
export function distanceText(km, units = 'metric') {
  const value = distanceIn(km, units);
  return `${numberText(value, value < 10 ? 1 : 0)}\u00a0${units === 'imperial' ? 'mi' : 'km'}`;
}

/** @param {number} metres @param {Units} [units] @param {number} [digits] @returns {string} */
export function heightText(metres, units = 'metric', digits = 0) {
  return units === 'imperial' ? `${numberText(metres * FEET_PER_M, 0)}\u00a0ft` : `${numberText(metres, digits)}\u00a0m`;
}

/** @param {number} metres @param {Units} units @returns {number} in the units of heights */
export function heightIn(metres, units) {
  return units === 'imperial' ? metres * FEET_PER_M : metres;
}

/** @param {number} km @param {Units} units @returns {number} in the units of distances */
export function distanceIn(km, units) {
  return units === 'imperial' ? km * MILES_PER_KM : km;
}

/** @param {string} text "150", "150 km", "90 mi" @param {Units} units of a bare number @returns {number|null} kilometres; null where it is no distance */
export function parseDistance(text, units) {
  const match = /^(.*?)\s*(km|mi)?$/i.exec(text.trim());
  const value = parseNumber(match?.[1] ?? '');
  if (value === null || value < 0) return null;
  const miles = match?.[2] ? match[2].toLowerCase() === 'mi' : units === 'imperial';
  return miles ? Math.round(value / MILES_PER_KM * 100) / 100 : value;
}

/**
 * A sentence of the server in the reader's units, with no line break between a number and its unit.
 * @param {string} text @param {Units} [units]
 */
export function told(text, units = 'metric') {
  const converted = text.replace(/(\d+(?:\.\d+)?) (km|m)(?![\w/²])/g, (_, digits, unit) => {
    const value = Number(digits);
    if (units === 'metric') return `${numberText(value, digits.includes('.') ? 1 : 0)} ${unit}`;
    return unit === 'km' ? distanceText(value, units) : heightText(value, units);
  });
  return unbroken(converted);
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
 * @returns {{place: Place} | {problem: string, swapped?: Place}}
 * @typedef {{latitude_deg: number, longitude_deg: number}} Place
 */
export function parsePlace(text) {
  const example = 'write it as latitude, longitude in degrees, such as 12.345, -6.789 (degrees and minutes, grid references and Plus Codes are read, too)';
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
  if (Math.abs(latitude) > 90) {
    const swapped = Math.abs(latitude) <= 180 && Math.abs(longitude) <= 90 ? { latitude_deg: longitude, longitude_deg: latitude } : undefined;
    return { problem: `Latitude ${latitude} is not on Earth: use ${MINUS}90 to 90.`, swapped };
  }
  if (Math.abs(longitude) > 180) return { problem: `Longitude ${longitude} is not on Earth: use ${MINUS}180 to 180.` };
  return { place: { latitude_deg: latitude, longitude_deg: longitude } };
}

/**
 * Reads the height of the aerial above the ground: "10", "10 m", "33 ft".
 * @param {string} text
 * @param {Units} [units] of a bare number
 * @returns {{height: number} | {problem: string}} metres
 */
export function parseHeight(text, units = 'metric') {
  const [least, most, example] = units === 'imperial' ? [3.3, 656, 33] : [...HEIGHTS_M, 10];
  const allowed = `write it in ${units === 'imperial' ? 'feet' : 'metres'} above the ground, ${plainText(least, 1)} to ${most}, such as ${example}`;
  const height = parseLength(text, units);
  if (!text.trim()) return { problem: `The height is empty: ${allowed}.` };
  if (height === null) return { problem: `“${text.trim()}” is not a height: ${allowed}.` };
  if (height < HEIGHTS_M[0] || height > HEIGHTS_M[1]) return { problem: `A height of “${text.trim()}” is not possible: ${allowed}.` };
  return { height };
}

/**
 * @param {string} text "10", "10 m", "33 ft"
 * @param {Units} units of a bare number
 * @returns {number|null} metres to a centimetre; null where it is no length
 */
export function parseLength(text, units) {
  const match = /^(.*?)\s*(m|ft|'|′)?$/i.exec(text.trim());
  const value = parseNumber(match?.[1] ?? '');
  if (value === null || value < 0) return null;
  const feet = match?.[2] ? match[2].toLowerCase() !== 'm' : units === 'imperial';
  return feet ? Math.round(value / FEET_PER_M * 100) / 100 : value;
}

/**
 * A number as people type it, with a point or a comma. What may be a comma between thousands is refused: "1,250".
 * @param {string} text
 * @param {string} [decimal] the mark that the reader's locale writes
 * @returns {number|null} null where it is no number
 */
export function parseNumber(text, decimal = DECIMAL) {
  const match = /^([-\u2212]?)(\d+)(?:([.,])(\d+))?$/.exec(text.trim());
  if (!match) return null;
  const [, sign, whole, mark, rest] = match;
  if (mark && mark !== decimal && rest.length === 3 && whole.length <= 3 && whole !== '0') return null;
  return Number(`${sign && '-'}${whole}.${rest ?? 0}`);
}

/** @param {number} bearing true @param {{declination_deg: number}|null|undefined} declination @returns {number} by compass */
export function compassBearing(bearing, declination) {
  return bearing - (declination?.declination_deg ?? 0);
}

/** @param {string} text @returns {string} with a capital and a full stop */
export function asSentence(text) {
  const file = /^[^\s:]+\.\w+:/.test(text); // a file's name stays as it is written
  const whole = file ? text : text.charAt(0).toUpperCase() + text.slice(1);
  return /[.!?]$/.test(whole) ? whole : `${whole}.`;
}
