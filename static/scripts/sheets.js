/** The sheets behind the answer: one is open at a time. */

/**
 * @param {HTMLElement} element
 * @param {{open: (sheet: string) => void}} actions
 */
export function createSheets(element, { open }) {
  const tabs = /** @type {HTMLElement[]} */ ([...element.querySelectorAll('[role=tab]')]);
  const named = (tab) => tab.id.slice(4);
  element.addEventListener('click', (event) => {
    const tab = /** @type {HTMLElement} */ (event.target).closest('[role=tab]');
    if (tab) open(named(tab));
  });
  element.addEventListener('keydown', (event) => {
    const place = tabs.indexOf(/** @type {HTMLElement} */ (event.target));
    const step = { ArrowRight: 1, ArrowDown: 1, ArrowLeft: -1, ArrowUp: -1 }[event.key];
    const next = step && place >= 0 ? (place + step + tabs.length) % tabs.length : { Home: 0, End: tabs.length - 1 }[event.key];
    if (place < 0 || next === undefined) return;
    event.preventDefault();
    open(named(tabs[next]));
    tabs[next].focus();
  });

  /** @param {import('./state.js').State} state */
  function update(state) {
    const shown = tabs.find((tab) => named(tab) === state.sheet) ?? tabs[0];
    for (const tab of tabs) {
      const chosen = tab === shown;
      tab.setAttribute('aria-selected', String(chosen));
      tab.tabIndex = chosen ? 0 : -1;
      const sheet = document.getElementById(named(tab));
      if (sheet) sheet.hidden = !chosen;
    }
  }
  return { update };
}
