/** What both map libraries need to know of our tiles. */

/** @param {{dark: boolean, version: string}} options @returns {string} pattern of the relief tiles' addresses */
export function tileUrl({ dark, version }) {
  return `${location.origin}/tiles/relief/{z}/{x}/{y}?theme=${dark ? 'dark' : 'light'}&version=${encodeURIComponent(version)}`;
}

/** @param {boolean} dark @returns {string} the colour where there is no ground; as --map-paper in map.css */
export function paper(dark) {
  return dark ? '#1c1d1f' : '#e6e6e3';
}
