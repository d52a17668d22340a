/** Steps that can be taken back. Pure: no page, no network. */

/** @param {number} [most] */
export function createHistory(most = 100) {
  /** @type {string[]} */
  const past = [];
  return {
    /** @param {string} kept what stands now; the same as before is no step */
    push(kept) {
      if (past.at(-1) !== kept) past.push(kept);
      if (past.length > most) past.shift();
    },
    /** @returns {string|null} what stood before */
    back() {
      if (past.length < 2) return null;
      past.pop();
      return past.at(-1) ?? null;
    },
    get steps() {
      return Math.max(0, past.length - 1);
    },
  };
}
