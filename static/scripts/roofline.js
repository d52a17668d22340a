/** The line for whoever turns the aerial. */

import { make, part } from './dom.js';
import { chainForTheRoof, titleOf } from './state.js';
import { bearingText, compassBearing, dayText, heightText, numberText, rodsText } from './units.js';

const SAME_MAST_DEG = 1;

/**
 * @param {HTMLElement} element
 * @param {{type: (change: object) => void}} actions
 */
export function createRoofline(element, { type }) {
  const list = part(element, 'ol');
  const title = part(element, '.chain');
  const compass = part(element, '.compass');
  const landmark = part(element, 'input');
  landmark.addEventListener('input', () => type({ landmark: landmark.value }));

  /** @param {import('./state.js').State} state */
  function update(state) {
    const name = chainForTheRoof(state);
    const chain = state.answer?.chains[name];
    element.hidden = !chain?.pointings[0];
    if (element.hidden) return;
    title.textContent = `${titleOf(state, name)}${name === state.now ? ', which is up now' : ''}`;
    if (landmark.value !== state.landmark) landmark.value = state.landmark;
    list.replaceChildren(...rows(state, name).map(([figure, words]) => make('li', {}, make('b', { textContent: figure }), ' ', make('span', { textContent: words }))));
    compass.textContent = about(state.answer.roof.declination);
  }
  return { update };
}

/**
 * Figures to carry up the ladder, each with what it is.
 * @param {import('./state.js').State} state @param {string} name of the chain
 * @returns {string[][]}
 */
function rows(state, name) {
  const { chains, roof } = state.answer;
  const aerials = chains[name].aerials?.length ? chains[name].aerials : [chains[name].pointings[0]];
  const level = levelToFind(state.answer, name, chains[name].pointings[0].pointing_deg);
  const turned = aerials.flatMap((aerial) => {
    const called = aerials.length > 1 ? `, ${aerial.name}` : '';
    return [
      [bearingText(aerial.pointing_deg), `from true north${called}`],
      ...(roof.declination ? [[bearingText(compassBearing(aerial.pointing_deg, roof.declination)), `by compass${called}`]] : []),
      [rodsText(aerial.polarisation), `as seen from the ground${called}`],
    ];
  });
  return [
    ...turned,
    [heightText(roof.aerial_agl_m, state.units), 'above the ground'],
    ...(level ? [[`${numberText(level.median, 0)}\u00a0dB(µV)`, `on ${level.channel} at ${level.outlet}; ${numberText(level.worst, 0)} on a bad night`]] : []),
  ];
}

/** @param {any} declination */
function about(declination) {
  if (!declination) return 'No compass bearing: the place or the day is outside the model of the Earth’s field.';
  const off = `${numberText(Math.abs(declination.declination_deg), 1)}° ${declination.declination_deg < 0 ? 'west' : 'east'}`;
  const day = dayText(declination.day);
  return `A compass points ${off} of true north here on ${day}, give or take ${numberText(2 * declination.error_deg, 1)}° (19 in 20; ${declination.model}); steel nearby turns it further. ${declination.caution ?? ''}`.trim();
}

/**
 * What a meter should find when the aerial is turned right: the surest emission from where it points, its
 * usual level and the one it keeps on a bad night.
 * @param {any} answer @param {string} chain @param {number} pointing degrees
 */
function levelToFind(answer, chain, pointing) {
  const away = (one) => Math.abs(((one.bearing_deg - pointing + 540) % 360) - 180);
  const heard = answer.emissions.filter((one) => one.chains[chain]);
  const least = Math.min(...heard.map(away));
  const ahead = heard.filter((one) => away(one) <= least + SAME_MAST_DEG);
  if (ahead.length === 0) return null;
  const surest = ahead.reduce((best, one) => (one.chains[chain].chance > best.chains[chain].chance ? one : best));
  const outlet = surest.chains[chain].outlets.reduce((least, one) => (one.margin_db < least.margin_db ? one : least));
  const channel = surest.channel ? `channel ${surest.channel}` : `${surest.frequency_mhz} MHz`;
  return { median: outlet.level_median_dbuv, worst: outlet.level_dbuv, outlet: outlet.name, channel };
}
