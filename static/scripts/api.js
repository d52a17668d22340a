/** The only module that asks the server. */

import { asSentence } from './units.js';

/** An answer that is no answer: what came, what is allowed, what to do next. */
export class ApiError extends Error {
  /**
   * @param {string} message
   * @param {{code?: string, field?: string|null, status?: number}} [more]
   */
  constructor(message, { code = 'unknown', field = null, status = 0 } = {}) {
    super(message);
    this.code = code;
    this.field = field;
    this.status = status;
  }
}

export const GONE =
  'Gainworth does not answer. Nothing you typed is lost, and what is shown is its last answer: start it again with “gainworth serve”, then press Work it out.';

/**
 * @param {string} path
 * @param {RequestInit} options
 * @param {typeof fetch} send
 */
async function ask(path, options, send) {
  let response;
  try {
    response = await send(path, options);
  } catch (error) {
    if (options.signal?.aborted) throw error;
    throw new ApiError(GONE, { code: 'gone' });
  }
  if (response.status === 204) return null;
  let body;
  try {
    body = await response.json();
  } catch (error) {
    if (options.signal?.aborted) throw error;
    throw new ApiError(`Gainworth gave an answer that cannot be read (status ${response.status}). Try again.`, {
      status: response.status,
    });
  }
  if (response.ok) return body;
  const error = body.error ?? {};
  throw new ApiError(asSentence(error.message ?? `status ${response.status}`), { ...error, status: response.status });
}

/** @param {typeof fetch} [send] */
export function createApi(send = (...args) => fetch(...args)) {
  return {
    /** @param {string} path @param {Record<string, string|number>} [query] @param {AbortSignal} [signal] */
    read(path, query, signal) {
      const asked = query ? `?${new URLSearchParams(Object.entries(query).map(([key, value]) => [key, String(value)]))}` : '';
      return ask(path + asked, { signal }, send);
    },
    /** @param {string} path @param {unknown} body @param {AbortSignal} [signal] */
    post(path, body, signal) {
      return ask(path, sent('POST', body, signal), send);
    },
    /** @param {string} path @param {unknown} body */
    put(path, body) {
      return ask(path, sent('PUT', body), send);
    },
    /** @param {string} path */
    remove(path) {
      return ask(path, { method: 'DELETE' }, send);
    },
  };
}

/** @param {string} method @param {unknown} body @param {AbortSignal} [signal] @returns {RequestInit} */
function sent(method, body, signal) {
  return { method, headers: { 'Content-Type': 'application/json' }, body: JSON.stringify(body), signal };
}
