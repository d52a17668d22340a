/** The page as it stands, as one file that needs neither server nor network. */

const LEFT_OUT = 'script, link, form, .map, .skip, .tabs, .buttons, button:not(.cell), template, .seen, .sheet[hidden], .sheet.roofs, footer a, .demo, .no-paper';

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
  for (const input of page.querySelectorAll('input')) {
    const field = copy.querySelector(`#${CSS.escape(input.id || 'none')}`)?.closest('.field');
    if (!field) continue;
    if (input.value) field.append(`: ${input.value}`); // a clone has no typed words
    else field.remove();
  }
  for (const input of copy.querySelectorAll('input, select')) input.remove();
  if (!copy.querySelector('.sheet')) copy.querySelector('.sheets')?.remove();
  for (const fold of copy.querySelectorAll('details')) fold.open = true;
  const style = page.createElement('style');
  style.textContent = STYLES_HERE;
  const rules = [...page.styleSheets].filter((one) => !one.href?.includes('/vendor/')).map(rulesOf);
  copy.querySelector('head')?.append(style);
  const when = page.createElement('p');
  when.textContent = `${roofOf(page)}As Gainworth said on ${new Date().toLocaleString()}.`;
  copy.querySelector('.masthead')?.append(when);
  // The serialiser would write ">" of a selector as "&gt;", so the rules enter after it.
  return `<!doctype html>\n${new XMLSerializer().serializeToString(copy).replace(STYLES_HERE, () => rules.join('\n'))}`;
}

/** @param {Document} page @returns {string} which roof it is, as the fields say it */
function roofOf(page) {
  const [place, height] = ['place', 'height'].map((id) => /** @type {HTMLInputElement | null} */ (page.getElementById(id)));
  if (!place || !height) return '';
  return `Roof at ${place.value}, aerial ${height.value} ${page.querySelector('.field-height .hint')?.textContent}. `;
}

/** @param {CSSStyleSheet} sheet @returns {string} its rules, for the medium that its link names */
function rulesOf(sheet) {
  const rules = [...sheet.cssRules].map((rule) => rule.cssText).join('\n');
  return sheet.media.mediaText ? `@media ${sheet.media.mediaText} {\n${rules}\n}` : rules;
}

/** @param {string} text @param {string} name */
export function download(text, name) {
  const address = URL.createObjectURL(new Blob([text], { type: 'text/html' }));
  const link = document.createElement('a');
  Object.assign(link, { href: address, download: name });
  link.click();
  setTimeout(() => URL.revokeObjectURL(address), 1000);
}
