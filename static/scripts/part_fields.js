/** What can be said of each kind of part. Pure: no page, no network. */

/** Kinds of parts in words. @type {Record<string, string>} */
export const PART_WORDS = {
  aerial: 'Aerial', 'masthead-amplifier': 'Masthead amplifier', 'launch-amplifier': 'Launch amplifier', feeder: 'Feeder',
  'fly-lead': 'Fly lead', filter: 'Filter', attenuator: 'Attenuator', equaliser: 'Equaliser', 'power-inserter': 'Power inserter',
  splitter: 'Splitter', tap: 'Tap', combiner: 'Combiner', switch: 'Switch', outlet: 'Outlet', receiver: 'Set', mast: 'Mast',
};

/** What a part starts with when it is added; everything may be changed after. @type {Record<string, any>} */
export const NEW_PARTS = {
  outlet: { loss_db: 1, price: 4 },
  feeder: { cable: 'copper-7mm', length_m: 10, price: 8 },
  splitter: { ports: 2, price: 5 },
  'masthead-amplifier': { gain_db: 18, noise_figure_db: 2, rated_output_dbuv: 103, price: 29 },
  'launch-amplifier': { gain_db: 20, noise_figure_db: 6, rated_output_dbuv: 116, price: 60 },
  attenuator: { loss_db: 6, price: 4 },
};

const amplifier = [
  { key: 'gain_db', label: 'Gain', unit: 'dB' },
  { key: 'noise_figure_db', label: 'Noise figure', unit: 'dB' },
  { key: 'rated_output_dbuv', label: 'Rated output', unit: 'dB(µV)' },
];
const cable = [{ key: 'cable', label: 'Cable' }, { key: 'length_m', label: 'Length', unit: 'm' }];
const loss = [{ key: 'loss_db', label: 'Loss', unit: 'dB' }];

/** @typedef {{key: string, label: string, unit?: string, whole?: boolean, choices?: string[][]}} PartField */
/** @type {Record<string, PartField[]>} */
const FIELDS = {
  aerial: [
    { key: 'gain_dbd', label: 'Gain', unit: 'MHz: dBd' },
    { key: 'beamwidth_deg', label: 'Beamwidth', unit: '°' },
    { key: 'front_to_back_db', label: 'Front to back', unit: 'dB' },
    { key: 'place', label: 'Where', choices: [['roof', 'on the roof'], ['loft', 'in the loft'], ['room', 'in a room']] },
  ],
  'masthead-amplifier': amplifier,
  'launch-amplifier': amplifier,
  feeder: cable,
  'fly-lead': cable,
  attenuator: loss,
  combiner: loss,
  switch: loss,
  outlet: loss,
  equaliser: [{ key: 'slope_db', label: 'Slope', unit: 'dB' }],
  'power-inserter': [{ key: 'supply_v', label: 'Supply', unit: 'V' }, { key: 'most_ma', label: 'At most', unit: 'mA' }],
  splitter: [{ key: 'ports', label: 'Ways', whole: true }],
  tap: [{ key: 'tap_loss_db', label: 'Tapped', unit: 'dB' }, { key: 'through_loss_db', label: 'Through', unit: 'dB' }, { key: 'ports', label: 'Ports', whole: true }],
  receiver: [{ key: 'noise_figure_db', label: 'Noise figure', unit: 'dB; empty: as planned for' }],
};

/** @param {string} kind @returns {PartField[]} */
export function fieldsOf(kind) {
  return FIELDS[kind] ?? [];
}

/** @param {number[][]} table MHz and dBd @returns {string} as it can be typed */
export function gainText(table) {
  return table.map(([mhz, dbd]) => `${mhz}: ${dbd}`).join('; ');
}

/** @param {string} text @returns {number[][]|null} null where it is no rising table of MHz and dBd */
export function parseGain(text) {
  const rows = text.split(/[;\n]/).filter((one) => one.trim());
  const table = rows.map((one) => /^\s*(\d+(?:\.\d+)?)\s*:\s*(-?\d+(?:[.,]\d+)?)\s*$/.exec(one)).map((one) => (one ? [Number(one[1]), Number(one[2].replace(',', '.'))] : null));
  if (!table.length || table.some((one) => one === null)) return null;
  const pairs = /** @type {number[][]} */ (table);
  return pairs.every(([mhz], place) => place === 0 || mhz > pairs[place - 1][0]) ? pairs : null;
}
