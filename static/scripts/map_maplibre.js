/** MapLibre behind the map's adapter; drawn by WebGL. */

/* global maplibregl */
import { tileUrl } from './map_tiles.js';

/** @param {number[]} bounds west, south, east, north @returns {number[][]} corners as the library has them */
const box = ([west, south, east, north]) => [[west, south], [east, north]];

/**
 * @param {HTMLElement} element
 * @param {import('./map.js').MapOptions} options
 * @returns {Promise<import('./map.js').MapAdapter>}
 */
export async function open(element, options) {
  const map = new maplibregl.Map({
    container: element,
    style: {
      version: 8,
      sources: { relief: { type: 'raster', tiles: [tileUrl(options)], tileSize: 256, maxzoom: 15 } },
      layers: [
        { id: 'relief', type: 'raster', source: 'relief', paint: { 'raster-fade-duration': 0 } },
      ],
    },
    ...(options.bounds ? { bounds: box(options.bounds), fitBoundsOptions: { padding: 4 } } : {}),
    attributionControl: false,
    keyboard: false,
    doubleClickZoom: false,
    dragRotate: false,
    pitchWithRotate: false,
    touchPitch: false,
    maxPitch: 0,
    maxZoom: 16,
    fadeDuration: 0,
    canvasContextAttributes: { preserveDrawingBuffer: options.keepPixels },
  });
  map.touchZoomRotate.disableRotation();
  map.scrollZoom.disable();
  for (const name of ['tabindex', 'role', 'aria-label']) map.getCanvas().removeAttribute(name); // the view round it has them
  map.on('move', options.onMove);
  map.on('resize', options.onMove);
  map.on('idle', options.onIdle);
  map.on('click', (event) => options.onClick(event.lngLat.lat, event.lngLat.wrap().lng));
  await new Promise((ready, failed) => {
    map.once('load', ready);
    map.once('error', (event) => failed(event.error));
  });
  return {
    project: (lat, lon) => map.project([lon, lat]),
    unproject: (x, y) => {
      const place = map.unproject([x, y]).wrap();
      return { latitude_deg: place.lat, longitude_deg: place.lng };
    },
    centre: (lat, lon) => map.jumpTo({ center: [lon, lat] }),
    fit: (bounds, padding) => map.fitBounds(box(bounds), { padding, animate: false, maxZoom: 12 }),
    pan: (x, y) => map.panBy([x, y], { animate: false }),
    zoom: (steps) => map.jumpTo({ zoom: map.getZoom() + steps }),
    wheel: (on) => (on ? map.scrollZoom.enable() : map.scrollZoom.disable()),
    theme: (dark) => map.getSource('relief').setTiles([tileUrl({ ...options, dark })]),
  };
}
