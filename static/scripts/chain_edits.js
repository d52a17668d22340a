/** Changes to a chain as a document: each gives a new one. Pure: no page, no network. */

import { NEW_PARTS, PART_WORDS } from './part_fields.js';

const AT_THE_AERIAL = ['filter', 'masthead-amplifier'];
const ENDS = ['outlet', 'fly-lead', 'receiver', 'mast'];
const SHARES = ['splitter', 'tap', 'outlet'];
const JOINS = ['combiner', 'switch'];

/** A chain without what the store adds, to be changed. @param {any} chain @returns {any} */
export function draftOf(chain) {
  const { id, created, updated, ...draft } = structuredClone(chain);
  return draft;
}

/** Every id of a part that is in use: the same id in two chains means the same thing. @param {any[]} chains @returns {Set<string>} */
export function idsOf(chains) {
  return new Set(chains.flatMap((chain) => chain.parts.map((one) => one.id)));
}

/** @param {string} stem @param {Set<string>} taken @returns {string} the stem with the first free number */
export function freeId(stem, taken) {
  let number = 1;
  while (taken.has(`${stem}-${number}`)) number += 1;
  return `${stem}-${number}`;
}

/**
 * Adds a part where it is of use: amplifiers and filters at the aerial, what ends a run before the set, all else
 * before the first part that shares the signal out. A further aerial comes with a combiner, if none is there.
 * @param {any} chain @param {string} kind @param {Set<string>} taken ids @returns {any}
 */
export function withPart(chain, kind, taken) {
  const next = draftOf(chain);
  if (kind === 'aerial') return withAerial(next, taken);
  const count = next.parts.filter((one) => one.kind === kind).length + 1;
  const made = { kind, id: freeId(kind, taken), name: count === 1 ? PART_WORDS[kind] : `${PART_WORDS[kind]} ${count}`, ...structuredClone(NEW_PARTS[kind]) };
  next.parts.splice(placeFor(next.parts, kind), 0, made);
  return next;
}

function placeFor(parts, kind) {
  if (AT_THE_AERIAL.includes(kind)) return Math.max(lastOf(parts, 'aerial'), ...JOINS.map((one) => lastOf(parts, one))) + 1;
  const set = parts.findIndex((one) => one.kind === 'receiver' && !fedBy(one).length);
  const end = set < 0 ? parts.length : set;
  if (ENDS.includes(kind)) return end;
  const shared = parts.findIndex((one) => SHARES.includes(one.kind));
  if (kind === 'splitter' || kind === 'tap') {
    const outlet = parts.findIndex((one) => one.kind === 'outlet');
    return outlet < 0 ? end : outlet;
  }
  return shared < 0 ? end : shared;
}

function withAerial(next, taken) {
  const first = next.parts.find((one) => one.kind === 'aerial');
  const count = next.parts.filter((one) => one.kind === 'aerial').length + 1;
  const { cuts, reflection, ...plain } = structuredClone(first);
  const made = { ...plain, id: freeId('aerial', taken), name: `${first.name} ${count}` };
  if (made.pattern === 'measured') made.pattern = 'class';
  next.parts.splice(lastOf(next.parts, 'aerial') + 1, 0, made);
  const joint = next.parts.find((one) => JOINS.includes(one.kind));
  if (joint) {
    if (fedBy(joint).length) joint.after = [...fedBy(joint), made.id];
    return next;
  }
  const combiner = { kind: 'combiner', id: freeId('combiner', taken), name: PART_WORDS.combiner, ...NEW_PARTS.combiner };
  for (const one of next.parts) if (fedBy(one).includes(first.id)) one.after = combiner.id;
  next.parts.splice(lastOf(next.parts, 'aerial') + 1, 0, combiner);
  return next;
}

/**
 * Takes a part out; what it fed is fed by what fed it. With the last but one aerial goes what joined them.
 * @param {any} chain @param {number} place @returns {any}
 */
export function withoutPart(chain, place) {
  const next = draftOf(chain);
  const [gone] = next.parts.splice(place, 1);
  bridged(next.parts, gone);
  const aerials = next.parts.filter((one) => one.kind === 'aerial');
  if (gone.kind === 'aerial' && aerials.length === 1) {
    const at = next.parts.findIndex((one) => JOINS.includes(one.kind));
    if (at >= 0) bridged(next.parts, { ...next.parts.splice(at, 1)[0], after: aerials[0].id });
    next.parts = [aerials[0], ...next.parts.filter((one) => one !== aerials[0])];
  }
  return next;
}

function bridged(parts, gone) {
  for (const one of parts) {
    const ids = fedBy(one);
    if (!ids.includes(gone.id)) continue;
    setAfter(one, ids.flatMap((id) => (id === gone.id ? fedBy(gone) : [id])));
  }
}

/** @param {any} chain @param {number} place @param {number} by @returns {any} */
export function moved(chain, place, by) {
  const next = draftOf(chain);
  const [taken] = next.parts.splice(place, 1);
  next.parts.splice(place + by, 0, taken);
  return next;
}

/** Says which parts feed one; none: by its place in the list. @param {any} chain @param {number} place @param {string[]} ids @returns {any} */
export function fed(chain, place, ids) {
  const next = draftOf(chain);
  setAfter(next.parts[place], ids);
  return next;
}

function setAfter(part, ids) {
  const each = [...new Set(ids)];
  if (each.length) part.after = each.length === 1 ? each[0] : each;
  else delete part.after;
  if (!each.length) delete part.port;
}

/** Ids that a part says it is fed by; none: by its place. @param {any} part @returns {string[]} */
export function fedBy(part) {
  return part.after === undefined || part.after === null ? [] : [part.after].flat();
}

/** Parts that may feed another: only leads and sets hang on an outlet. @param {any} chain @param {any} part @returns {any[]} */
export function couldFeed(chain, part) {
  const behindOutlets = ['fly-lead', 'receiver'].includes(part.kind);
  return chain.parts.filter((one) => one.id !== part.id && !['receiver', 'mast'].includes(one.kind) && ['outlet', 'fly-lead'].includes(one.kind) === behindOutlets);
}

/** Whether a part can be fed by several. @param {any} part */
export function joins(part) {
  return JOINS.includes(part.kind);
}

/** Whether it has to be said which part feeds which. @param {any} chain */
export function hasBranches(chain) {
  return chain.parts.some((one) => fedBy(one).length > 0 || joins(one) || one.kind === 'tap');
}

function lastOf(parts, kind) {
  return parts.map((one) => one.kind).lastIndexOf(kind);
}

/**
 * Where in the chains of a question a refusal points.
 * @param {string|null|undefined} field as the server names it, such as "chains[1].parts[2].length_m"
 * @param {any[]|undefined} chains as they were asked, names or documents
 * @returns {{chain: string, part: number|null, key: string|null}|null} null where it points elsewhere
 */
export function placeOfTrouble(field, chains) {
  const found = /^chains\[(\d+)\](?:\.parts\[(\d+)\])?(?:\.(\w+))?/.exec(field ?? '');
  const chain = found && chains?.[Number(found[1])];
  if (!chain) return null;
  return { chain: chain.name ?? chain, part: found[2] === undefined ? null : Number(found[2]), key: found[3] ?? null };
}
