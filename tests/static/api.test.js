import assert from 'node:assert/strict';
import test from 'node:test';
import { createApi, GONE } from '../../static/scripts/api.js';
import { latest } from '../../static/scripts/latest.js';

const reply = (status, body) => async () => new Response(JSON.stringify(body), { status });

test('an answer comes back as it was sent', async () => {
  assert.deepEqual(await createApi(reply(200, { a: 1 })).read('/api/health'), { a: 1 });
});

test('an error keeps the server’s words and field', async () => {
  const api = createApi(reply(422, { error: { code: 'roof', message: 'latitude 91 is not possible', field: 'roof.latitude_deg', allowed: null } }));
  await assert.rejects(api.post('/api/assess', {}), { message: 'Latitude 91 is not possible.', code: 'roof', field: 'roof.latitude_deg', status: 422 });
});

test('a server that is gone is told in plain words', async () => {
  const api = createApi(async () => { throw new TypeError('Failed to fetch'); });
  await assert.rejects(api.read('/api/health'), { message: GONE, code: 'gone' });
});

test('an answer that is no JSON is told in plain words', async () => {
  const api = createApi(async () => new Response('<html>', { status: 502 }));
  await assert.rejects(api.read('/api/health'), { message: /cannot be read \(status 502\)/ });
});

test('a question is put into the address with its values escaped', async () => {
  let asked = '';
  await createApi(async (path) => { asked = path; return new Response('{}'); }).read('/api/path', { a: 1.5, b: 'x&y' });
  assert.equal(asked, '/api/path?a=1.5&b=x%26y');
});

test('a later question cancels the one before, whose answer is dropped', async () => {
  const signals = [];
  const waiting = [];
  const ask = latest((signal, name) => new Promise((answer) => { signals.push(signal); waiting.push(() => answer(name)); }));
  const first = ask('first');
  const second = ask('second');
  waiting[1]();
  waiting[0]();
  assert.deepEqual([await first, await second], [undefined, 'second']);
  assert.deepEqual(signals.map((one) => one.aborted), [true, false]);
});

test('an error of an overtaken question is silent, that of the last is heard', async () => {
  const ask = latest(async (signal, name) => { throw new Error(name); });
  const first = ask('first');
  const second = ask('second');
  assert.equal(await first, undefined);
  await assert.rejects(second, { message: 'second' });
});

test('what is kept is sent whole, and what is gone answers nothing', async () => {
  const sent = [];
  const api = createApi(async (path, options) => { sent.push([path, options.method, options.body]); return new Response(null, { status: 204 }); });
  assert.equal(await api.remove('/api/roofs/1'), null);
  assert.equal(await api.put('/api/roofs/1', { name: 'a' }), null);
  assert.deepEqual(sent, [['/api/roofs/1', 'DELETE', undefined], ['/api/roofs/1', 'PUT', '{"name":"a"}']]);
});
