/** The page over /openapi.json: every address, what it takes, in our own words and under our own policy. */

import { createApi } from './api.js';
import { part } from './dom.js';
import { operations } from './openapi.js';

const list = /** @type {HTMLElement} */ (document.getElementById('operations'));
const card = /** @type {HTMLTemplateElement} */ (document.getElementById('operation'));

/** @param {string} tag @param {string} words @param {string} [name] */
function element(tag, words, name) {
  const node = Object.assign(document.createElement(tag), { textContent: words });
  if (name) node.className = name;
  return node;
}

/** @param {import('./openapi.js').Operation} one */
function shown(one) {
  const made = /** @type {DocumentFragment} */ (card.content.cloneNode(true));
  part(made, 'h3').append(element('b', one.method), ' ', element('code', one.path));
  part(made, '.title').textContent = one.title;
  part(made, '.words').textContent = one.words;
  part(made, '.scroll').setAttribute('aria-label', `What ${one.method} ${one.path} takes`);
  part(made, '.scroll').hidden = one.rows.length === 0;
  part(made, 'tbody').append(...one.rows.map((row) => {
    const line = document.createElement('tr');
    const name = element('th', row.name);
    name.setAttribute('scope', 'row');
    const note = [row.needed ? 'needed' : '', row.words].filter(Boolean).join(': ');
    line.append(name, element('td', row.place), element('td', row.type), element('td', row.standard), element('td', note));
    return line;
  }));
  return made;
}

try {
  const all = operations(await createApi().read('/openapi.json'));
  for (const group of new Set(all.map((one) => one.group))) {
    const section = document.createElement('section');
    section.append(element('h2', group), ...all.filter((one) => one.group === group).map(shown));
    list.append(section);
  }
} catch (error) {
  list.append(element('p', error.message));
}
document.documentElement.dataset.ready = 'yes';
