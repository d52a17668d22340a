/** Steps taken back are taken again: by a button, and both ways by the keys that people know. */

const TYPED_IN = 'input:not([type=checkbox], [type=radio], [type=file]), textarea';

/**
 * @param {HTMLElement} button that takes the last step again
 * @param {{back: () => void, forward: () => void}} actions
 */
export function createSteps(button, { back, forward }) {
  button.addEventListener('click', forward);
  document.addEventListener('keydown', (event) => {
    const key = event.key.toLowerCase();
    const typing = /** @type {HTMLElement} */ (event.target).closest?.(TYPED_IN); // there the browser takes letters back
    if (!(event.ctrlKey || event.metaKey) || event.altKey || typing || !['z', 'y'].includes(key)) return;
    event.preventDefault();
    if (key === 'y' || event.shiftKey) forward();
    else back();
  });

  /** @param {import('./state.js').State} state */
  function update(state) {
    const focused = document.activeElement === button;
    button.hidden = state.undone === 0;
    if (focused && button.hidden) /** @type {HTMLElement|null} */ (button.parentElement?.querySelector('button:not([hidden])'))?.focus();
  }
  return { update };
}
