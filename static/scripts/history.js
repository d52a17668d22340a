/** Steps that can be taken back, and again. Pure: no page, no network. */

/** @param {number} [most] */
export function createHistory(most = 100) {
  /** @type {string[]} */
  const past = [];
  /** @type {string[]} */
  const undone = [];
  return {
    /** @param {string} kept what stands now; the same as before is no step, another ends what was taken back */
    push(kept) {
      if (past.at(-1) === kept) return;
      past.push(kept);
      undone.length = 0;
      if (past.length > most) past.shift();
    },
    /** @returns {string|null} what stood before */
    back() {
      if (past.length < 2) return null;
      undone.push(/** @type {string} */ (past.pop()));
      return past.at(-1) ?? null;
    },
    /** @returns {string|null} what was taken back last */
    forward() {
      const kept = undone.pop() ?? null;
      if (kept !== null) past.push(kept);
      return kept;
    },
    get steps() {
      return Math.max(0, past.length - 1);
    },
    get undone() {
      return undone.length;
    },
  };
}
