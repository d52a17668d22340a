/** Only the last question counts. Pure: no page, no network. */

/**
 * Wraps an asynchronous question so that a new one cancels the one before, and an answer that
 * arrives out of its turn is dropped.
 * @template A, R
 * @param {(signal: AbortSignal, ...args: A[]) => Promise<R>} ask
 * @returns {(...args: A[]) => Promise<R|undefined>} undefined: overtaken by a later question
 */
export function latest(ask) {
  /** @type {AbortController|null} */
  let current = null;
  return async (...args) => {
    current?.abort();
    const mine = new AbortController();
    current = mine;
    try {
      const answer = await ask(mine.signal, ...args);
      return current === mine ? answer : undefined;
    } catch (error) {
      if (current === mine) throw error;
      return undefined;
    }
  };
}
