/**
 * An OpenAPI 3.1 document as rows to read. Pure: no page, no network.
 *
 * @typedef {{name: string, place: string, type: string, needed: boolean, standard: string, words: string}} Row
 * @typedef {{group: string, method: string, path: string, title: string, words: string, rows: Row[]}} Operation
 */

/** @param {any} document @returns {Operation[]} */
export function operations(document) {
  return Object.entries(document.paths).flatMap(([path, methods]) =>
    Object.entries(methods).map(([method, one]) => ({
      group: one.tags?.[0] ?? '',
      method: method.toUpperCase(),
      path,
      title: one.summary ?? '',
      words: one.description ?? '',
      rows: [
        ...(one.parameters ?? []).map((row) => ({
          ...described(document, row.name, row.schema, Boolean(row.required)),
          place: row.in,
          words: row.description ?? row.schema.description ?? '',
        })),
        ...fields(document, one.requestBody?.content?.['application/json']?.schema, ''),
      ],
    })),
  );
}

/**
 * The fields of a body, those of objects inside it with their place before them.
 * @param {any} document @param {any} schema @param {string} prefix @returns {Row[]}
 */
function fields(document, schema, prefix) {
  const whole = schema && resolved(document, schema);
  if (!whole?.properties) return [];
  return Object.entries(whole.properties).flatMap(([name, part]) => {
    const inner = resolved(document, part);
    const needed = (whole.required ?? []).includes(name);
    const row = { ...described(document, prefix + name, part, needed), place: 'body', words: part.description ?? '' };
    const item = inner.items && resolved(document, inner.items);
    return [row, ...fields(document, part, `${prefix}${name}.`), ...(item?.properties ? fields(document, item, `${prefix}${name}[].`) : [])];
  });
}

function described(document, name, schema, needed) {
  const standard = schema.default === undefined || schema.default === null ? '' : JSON.stringify(schema.default);
  return { name, type: typeText(document, schema), needed, standard };
}

/** @param {any} document @param {any} schema @returns {string} for instance "number, −90 to 90" */
export function typeText(document, schema) {
  const whole = resolved(document, schema);
  if (whole.anyOf) return whole.anyOf.map((one) => typeText(document, one)).join(' or ');
  if (whole.enum) return whole.enum.map((one) => JSON.stringify(one)).join(', ');
  if (whole.type === 'array') return `list of ${typeText(document, whole.items ?? {})}`;
  const { minimum, maximum } = whole;
  const limits = minimum !== undefined && maximum !== undefined ? `, ${minimum} to ${maximum}` : '';
  return ({ string: 'text', integer: 'whole number' }[whole.type] ?? whole.type ?? 'anything') + limits;
}

function resolved(document, schema) {
  const name = schema.$ref?.split('/').at(-1);
  return name ? document.components.schemas[name] : schema;
}
