/** What both map libraries need to know of our tiles. */

/** @param {{dark: boolean, version: string}} options @returns {string} pattern of the relief tiles' addresses */
export function tileUrl({ dark, version }) {
  return `${location.origin}/tiles/relief/{z}/{x}/{y}?theme=${dark ? 'dark' : 'light'}&version=${encodeURIComponent(version)}`;
}
