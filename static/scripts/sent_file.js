/** A file as it is sent: its name and its bytes in base64. Pure: no page, no network. */

const MOST_BYTES = 700_000; // in base64 a third more, and the server reads 1 MB

/**
 * @param {HTMLInputElement} input @param {string} what is missing where no file was chosen
 * @returns {Promise<{name: string, base64: string}>}
 */
export async function sent(input, what) {
  const file = input.files?.[0];
  if (!file) throw new Error(`Choose ${what}.`);
  if (file.size > MOST_BYTES) throw new Error(`${file.name} has ${Math.ceil(file.size / 1000)} kB, the limit here is ${MOST_BYTES / 1000} kB: export the measurement alone, or with fewer points.`);
  return { name: file.name, base64: base64(new Uint8Array(await file.arrayBuffer())) };
}

/** @param {Uint8Array} bytes @returns {string} */
export function base64(bytes) {
  let text = '';
  for (let start = 0; start < bytes.length; start += 0x8000) text += String.fromCharCode(...bytes.subarray(start, start + 0x8000));
  return btoa(text);
}
