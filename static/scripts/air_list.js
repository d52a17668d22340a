/** Search and filter over the list of channels. Pure: no page, no network. */

export const SHOWN_ROWS = 200;

/**
 * Channels joined with the names of their masts and multiplexes.
 * @param {any[]} emissions @param {any[]} transmitters @param {any[]} multiplexes
 */
export function joined(emissions, transmitters, multiplexes) {
  const masts = new Map(transmitters.map((one) => [one.id, one.name]));
  const names = new Map(multiplexes.map((one) => [one.id, one.name]));
  return emissions.map((one) => ({ ...one, transmitter: masts.get(one.transmitter_id) ?? one.transmitter_id, multiplex: names.get(one.multiplex_id) ?? one.multiplex_id }));
}

/**
 * @param {any[]} rows joined
 * @param {{search: string, filter: string, near: Map<string, any>, today: string}} wish filter: all, near, off, dated
 */
export function found(rows, { search, filter, near, today }) {
  const words = search.toLowerCase().split(/\s+/).filter(Boolean);
  const fits = (one) => {
    const text = `${one.transmitter} ${one.multiplex} ${one.channel} ${one.frequency_mhz} ${one.system}`.toLowerCase();
    return words.every((word) => text.includes(word));
  };
  const kept = {
    all: () => true,
    near: (one) => near.has(one.id),
    off: (one) => !one.on,
    dated: (one) => Boolean(one.valid_to) || (one.valid_from ?? '') > today,
  }[filter] ?? (() => true);
  return rows.filter((one) => kept(one) && fits(one));
}
