/** The page as it stands, as one file that needs neither server nor network. */

const LEFT_OUT = 'script, link, form, .map, .skip, .tabs, .buttons, button:not(.cell), template, .seen, .sheet[hidden], footer a, .demo, .no-paper';

const STYLES_HERE = '/* styles */';

/** @param {Document} page @returns {string} HTML with its styles inside */
export function asOneFile(page) {
  const copy = /** @type {HTMLElement} */ (page.documentElement.cloneNode(true));
  for (const node of copy.querySelectorAll(LEFT_OUT)) node.remove();
  for (const cell of copy.querySelectorAll('button.cell')) {
    const plain = page.createElement('span');
    plain.className = 'cell';
    plain.append(...cell.childNodes);
    cell.replaceWith(plain);
  }
  for (const input of copy.querySelectorAll('input, select')) input.remove();
  for (const fold of copy.querySelectorAll('details')) fold.open = true;
  const style = page.createElement('style');
  style.textContent = STYLES_HERE;
  const rules = [...page.styleSheets].filter((one) => !one.href?.includes('/vendor/')).flatMap((one) => [...one.cssRules].map((rule) => rule.cssText));
  copy.querySelector('head')?.append(style);
  const when = page.createElement('p');
  when.textContent = `As Gainworth said on ${new Date().toLocaleString()}.`;
  copy.querySelector('footer')?.prepend(when);
  // The serialiser would write ">" of a selector as "&gt;", so the rules enter after it.
  return `<!doctype html>\n${new XMLSerializer().serializeToString(copy).replace(STYLES_HERE, () => rules.join('\n'))}`;
}

/** @param {string} text @param {string} name */
export function download(text, name) {
  const address = URL.createObjectURL(new Blob([text], { type: 'text/html' }));
  const link = document.createElement('a');
  Object.assign(link, { href: address, download: name });
  link.click();
  setTimeout(() => URL.revokeObjectURL(address), 1000);
}
