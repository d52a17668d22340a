import assert from 'node:assert/strict';
import test from 'node:test';
import { operations, typeText } from '../../static/scripts/openapi.js';

const DOCUMENT = {
  paths: {
    '/api/assess': { post: { tags: ['answers'], summary: 'Ask', requestBody: { content: { 'application/json': { schema: { $ref: '#/components/schemas/Ask' } } } } } },
    '/api/x/{id}': { get: { parameters: [{ name: 'id', in: 'path', required: true, schema: { type: 'string' } }] } },
  },
  components: {
    schemas: {
      Ask: { type: 'object', properties: { roof: { $ref: '#/components/schemas/Roof' }, reach: { type: 'number', default: 150 } }, required: ['roof'] },
      Roof: { type: 'object', properties: { lat: { type: 'number', minimum: -90, maximum: 90 } }, required: ['lat'] },
    },
  },
};

test('the fields of a body are listed with their place', () => {
  const [ask] = operations(DOCUMENT);
  assert.deepEqual(ask.rows.map((row) => [row.name, row.type, row.needed, row.standard]), [
    ['roof', 'object', true, ''],
    ['roof.lat', 'number, -90 to 90', true, ''],
    ['reach', 'number', false, '150'],
  ]);
});

test('parameters of an address are listed', () => {
  assert.deepEqual(operations(DOCUMENT)[1].rows.map((row) => [row.name, row.place, row.type]), [['id', 'path', 'text']]);
});

test('types are told in words', () => {
  assert.equal(typeText({}, { anyOf: [{ type: 'array', items: { type: 'string' } }, { type: 'null' }] }), 'list of text or null');
  assert.equal(typeText({}, { enum: [50, 90] }), '50, 90');
});
