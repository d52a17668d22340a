/** Leaflet behind the map's adapter; drawn without WebGL. */

/* global L */
import { tileUrl } from './map_tiles.js';

/**
 * @param {HTMLElement} element
 * @param {import('./map.js').MapOptions} options
 * @returns {Promise<import('./map.js').MapAdapter>}
 */
export async function open(element, options) {
  const map = L.map(element, {
    attributionControl: false,
    zoomControl: false,
    keyboard: false,
    doubleClickZoom: false,
    scrollWheelZoom: false,
    zoomAnimation: false,
    fadeAnimation: false,
    inertia: false,
    maxZoom: 16,
    center: [0, 0],
    zoom: 2,
  });
  if (options.bounds) fit(options.bounds, 4);
  const relief = L.tileLayer(tileUrl(options), { maxNativeZoom: 15, maxZoom: 16 }).addTo(map);
  relief.on('load', options.onIdle);
  map.on('move zoom resize', options.onMove);
  /** @param {number[]} bounds west, south, east, north @param {number} padding */
  function fit([west, south, east, north], padding) {
    map.fitBounds([[south, west], [north, east]], { padding: [padding, padding], animate: false, maxZoom: 12 });
  }
  map.on('click', (event) => options.onClick(event.latlng.lat, event.latlng.wrap().lng));
  return {
    project: (lat, lon) => map.latLngToContainerPoint([lat, lon]),
    unproject: (x, y) => {
      const place = map.containerPointToLatLng([x, y]).wrap();
      return { latitude_deg: place.lat, longitude_deg: place.lng };
    },
    centre: (lat, lon) => map.setView([lat, lon], map.getZoom(), { animate: false }),
    fit,
    pan: (x, y) => map.panBy([x, y], { animate: false }),
    zoom: (steps) => map.setZoom(map.getZoom() + steps, { animate: false }),
    wheel: (on) => (on ? map.scrollWheelZoom.enable() : map.scrollWheelZoom.disable()),
    theme: (dark) => relief.setUrl(tileUrl({ ...options, dark })),
  };
}
