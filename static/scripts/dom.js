/** Elements in a line each. Text enters as text, never as markup. */

const SVG = 'http://www.w3.org/2000/svg';

/**
 * @param {string} tag
 * @param {Record<string, any>} [props] properties, or attributes where the name has a dash
 * @param {...(Node|string)} children
 * @returns {any}
 */
export function make(tag, props = {}, ...children) {
  const node = document.createElement(tag);
  for (const [key, value] of Object.entries(props)) {
    if (value === undefined || value === null) continue;
    if (key.includes('-') || key === 'role' || key === 'colspan') node.setAttribute(key, String(value));
    else /** @type {any} */ (node)[key] = value;
  }
  node.append(...children);
  return node;
}

/**
 * @param {string} tag
 * @param {Record<string, string|number>} attributes
 * @param {string} [text]
 * @returns {SVGElement}
 */
export function shape(tag, attributes, text) {
  const node = document.createElementNS(SVG, tag);
  for (const [key, value] of Object.entries(attributes)) node.setAttribute(key, String(value));
  if (text !== undefined) node.textContent = text;
  return node;
}

/** @param {ParentNode} root @param {string} selector @returns {any} the element that the page is known to hold */
export function part(root, selector) {
  return root.querySelector(selector);
}

/** The mark of a grade, drawn from the page's symbols. @param {string} grade */
export function mark(grade) {
  const svg = shape('svg', { class: 'mark', 'aria-hidden': 'true' });
  svg.append(shape('use', { href: `#mark-${grade}` }));
  return svg;
}

/**
 * A labelled field, as on the survey sheet.
 * @param {string} label @param {HTMLElement} control @param {string} [hint]
 */
export function field(label, control, hint = '') {
  control.id ||= `field-${(field.count += 1)}`;
  const words = make('label', { htmlFor: control.id }, label);
  if (hint) words.append(' ', make('span', { className: 'hint', textContent: hint }));
  return make('p', { className: 'field' }, words, control);
}
field.count = 0;

/** @param {string} text @param {() => void} press @param {Record<string, any>} [props] */
export function button(text, press, props = {}) {
  return make('button', { type: 'button', textContent: text, onclick: press, ...props });
}

/** @param {string[][]} pairs value and text @param {string} chosen @param {Record<string, any>} [props] */
export function select(pairs, chosen, props = {}) {
  const made = make('select', props, ...pairs.map(([value, textContent]) => make('option', { value, textContent })));
  made.value = chosen;
  return made;
}

/**
 * Puts rows in place of those there, without losing the focus of a control that is made anew under the same key.
 * @param {HTMLElement} parent @param {...(Node|string)} children
 */
export function refill(parent, ...children) {
  const active = /** @type {HTMLElement|null} */ (document.activeElement);
  const key = active && parent.contains(active) ? active.dataset.key : undefined;
  parent.replaceChildren(...children);
  if (key) /** @type {HTMLElement[]} */ ([...parent.querySelectorAll('[data-key]')]).find((one) => one.dataset.key === key)?.focus();
}
