/** Where this device is, if its user presses the button and the browser agrees. */

const WHY = {
  1: 'The browser was not allowed to say where this device is: allow it for this page, or type the position.',
  2: 'This device does not know where it is: type the position, or click it on the map.',
  3: 'This device did not find its place in time: try again outdoors, or type the position.',
};
const NOT_HERE = 'Browsers tell the place of a device only to pages that are opened on it (localhost) or by https: type the position.';
const PATIENCE_MS = 15_000;
const SURE_M = 50;

/**
 * @param {HTMLElement} element the form that holds the button
 * @param {{place: (place: import('./state.js').Place) => void}} actions
 * @param {Geolocation|undefined} [device]
 */
export function createHere(element, { place }, device = globalThis.isSecureContext ? navigator.geolocation : undefined) {
  const press = /** @type {HTMLButtonElement} */ (element.querySelector('.here'));
  const said = /** @type {HTMLElement} */ (element.querySelector('.here-said'));
  press.addEventListener('click', () => {
    if (!device) return void (said.textContent = NOT_HERE);
    press.disabled = true;
    said.textContent = 'Asking the browser where this device is …';
    device.getCurrentPosition(found, failed, { enableHighAccuracy: true, timeout: PATIENCE_MS, maximumAge: 0 });
  });

  /** @param {GeolocationPosition} position */
  function found({ coords }) {
    press.disabled = false;
    const { latitude, longitude, accuracy } = coords;
    said.textContent = accuracy > SURE_M ? `The device is only sure within ${Math.round(accuracy)} m: check the place on the map.` : '';
    place({ latitude_deg: latitude, longitude_deg: longitude });
  }

  /** @param {{code: number}} error */
  function failed({ code }) {
    press.disabled = false;
    said.textContent = WHY[code] ?? WHY[2];
  }
}
