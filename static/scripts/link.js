/** What a link may hold, and what to say of the rest. Pure: no page, no network. */

const SEEN = ['perfect', 'breaks up', 'not found'];
const AROUND = ['open', 'suburban', 'urban', 'trees', 'mapped'];
const SHEETS = ['skyline', 'path', 'ledger', 'elsewhere', 'readings', 'chains', 'roofs', 'transmitters', 'assumptions', 'downloads'];
const KNOWN = ['v', 'at', 'height', 'now', 'idea', 'multiplex', 'chain', 'sheet', 'more'];

const isText = (value) => typeof value === 'string';
const isNumber = (value) => typeof value === 'number' && Number.isFinite(value);
const isObject = (value) => typeof value === 'object' && value !== null && !Array.isArray(value);
const holds = (...keys) => (value) => isObject(value) && keys.every((key) => isNumber(value[key]));

/** Which part of each value can be used. @type {Record<string, (value: any) => boolean>} */
const EACH = {
  second: isText,
  around: (value) => AROUND.includes(value),
  landmark: isText,
  seen: (value) => SEEN.includes(value),
  settings: (value) => isText(value) || isNumber(value),
  assumptions: isNumber,
  obstacles: holds('bearing_deg', 'distance_m', 'height_agl_m', 'width_m'),
  edits: (value) => isObject(value) && isText(value.name) && Array.isArray(value.parts),
  pins: (value) => isObject(value) && isText(value.name) && isNumber(value.height) && holds('latitude_deg', 'longitude_deg')(value.where),
};

/**
 * What of a value has the shape it should have, and the names of what has not.
 * @param {string} key @param {any} value @param {any} usual
 * @returns {{value: any, dropped: string[]}}
 */
export function usable(key, value, usual) {
  const fits = EACH[key] ?? (() => true);
  if (Array.isArray(usual)) {
    if (!Array.isArray(value)) return { value: usual, dropped: [key] };
    return { value: value.filter(fits), dropped: value.every(fits) ? [] : [`${value.filter((one) => !fits(one)).length} of ${key}`] };
  }
  if (isObject(usual)) {
    if (!isObject(value)) return { value: usual, dropped: [key] };
    const pairs = Object.entries(value);
    return { value: Object.fromEntries(pairs.filter(([, one]) => fits(one))), dropped: pairs.filter(([, one]) => !fits(one)).map(([name]) => `${key}: ${name}`) };
  }
  return fits(value) ? { value, dropped: [] } : { value: usual, dropped: [`${key} “${short(value)}”`] };
}

/** Names in a link that mean nothing here. @param {URLSearchParams} kept @returns {string[]} */
export function strangers(kept) {
  return [...new Set(kept.keys())].filter((key) => !KNOWN.includes(key)).map((key) => `“${short(key)}”`);
}

/** @param {string} sheet */
export function isSheet(sheet) {
  return SHEETS.includes(sheet);
}

/**
 * What to tell of a link that was not wholly understood.
 * @param {string} version it was made by @param {string} current @param {string[]} dropped
 * @returns {string[]} sentences, none where all of it was taken
 */
export function linkNotes(version, current, dropped) {
  const from = Number(version) < Number(current) ? 'an older version' : 'another version';
  return [
    ...(version === current ? [] : [`This link was made by ${from} of Gainworth: what it holds is filled in, look it over.`]),
    ...(dropped.length ? [`Left out, as it means nothing here: ${dropped.slice(0, 8).join('; ')}${dropped.length > 8 ? ` and ${dropped.length - 8} more` : ''}.`] : []),
  ];
}

/** @param {unknown} value */
function short(value) {
  const text = isText(value) ? value : JSON.stringify(value) ?? '';
  return text.length > 24 ? `${text.slice(0, 23)}…` : text;
}
