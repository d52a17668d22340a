/** The line for whoever turns the aerial. */

import { NOTHING, titleOf, verdictOf } from './state.js';
import { bearingText, numberText, rodsText } from './units.js';

const SAME_MAST_DEG = 1;

/** @param {HTMLElement} element */
export function createRoofline(element) {
  const list = /** @type {HTMLElement} */ (element.querySelector('ol'));
  const title = /** @type {HTMLElement} */ (element.querySelector('.chain'));

  /** @param {import('./state.js').State} state */
  function update(state) {
    const verdict = verdictOf(state);
    const name = verdict?.candidate ?? NOTHING;
    const pointing = state.answer?.chains[name]?.pointings[0];
    element.hidden = !pointing;
    if (!pointing) return;
    title.textContent = titleOf(state, name);
    const level = levelToFind(state.answer, name, pointing.pointing_deg);
    const rows = [
      [bearingText(pointing.pointing_deg), 'from true north'],
      [rodsText(pointing.polarisation), 'as seen from the ground'],
      [`${numberText(state.answer.roof.aerial_agl_m, 0)}\u00a0m`, 'above the ground'],
      ...(level ? [[`${numberText(level.median, 0)}\u00a0dB(µV)`, `on ${level.channel} at ${level.outlet}; ${numberText(level.worst, 0)} on a bad night`]] : []),
    ];
    list.replaceChildren(...rows.map(([figure, words]) => {
      const item = document.createElement('li');
      item.append(
        Object.assign(document.createElement('b'), { textContent: figure }), ' ',
        Object.assign(document.createElement('span'), { textContent: words }),
      );
      return item;
    }));
  }
  return { update };
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
