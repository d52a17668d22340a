/** What can be said of each kind of part. Pure: no page, no network. */

/** Kinds of parts in words. @type {Record<string, string>} */
export const PART_WORDS = {
  aerial: 'Aerial', 'masthead-amplifier': 'Masthead amplifier', 'launch-amplifier': 'Launch amplifier', feeder: 'Feeder',
  'fly-lead': 'Fly lead', filter: 'Filter', attenuator: 'Attenuator', equaliser: 'Equaliser', 'power-inserter': 'Power inserter',
  splitter: 'Splitter', tap: 'Tap', combiner: 'Combiner', switch: 'Switch', outlet: 'Outlet', receiver: 'Set', mast: 'Mast',
};

/** What a part starts with when it is added, figures and prices as an example; everything may be changed after. @type {Record<string, any>} */
export const NEW_PARTS = {
  outlet: { loss_db: 1, price: 4 },
  feeder: { cable: 'copper-7mm', length_m: 10, price: 8 },
  'fly-lead': { cable: 'copper-7mm', length_m: 2, price: 3 },
  splitter: { ports: 2, price: 5 },
  tap: { tap_loss_db: 10, through_loss_db: 2, ports: 1, price: 6 },
  'masthead-amplifier': { gain_db: 18, noise_figure_db: 2, rated_output_dbuv: 103, price: 29 },
  'launch-amplifier': { gain_db: 20, noise_figure_db: 6, rated_output_dbuv: 116, price: 60 },
  'power-inserter': { supply_v: 12, most_ma: 100, price: 14 },
  filter: { loss_db: [[470, 1], [694, 1.5], [703, 15], [790, 30]], price: 15 },
  attenuator: { loss_db: 6, price: 4 },
  equaliser: { slope_db: 6, price: 8 },
  combiner: { loss_db: 4, price: 9 },
  switch: { loss_db: 1, price: 12 },
  mast: { diameter_mm: 40, wall_mm: 2, free_m: 2, clamped_m: 1, price: 25 },
};

/** What can be added, the usual first; a further aerial is joined by a combiner. */
export const CAN_BE_ADDED = ['outlet', 'feeder', 'splitter', 'masthead-amplifier', 'aerial', ...Object.keys(NEW_PARTS).filter((kind) => !['outlet', 'feeder', 'splitter', 'masthead-amplifier'].includes(kind))];

/** A chain to begin with where none is kept: every figure and price is an example to be replaced. */
export const BEGINNING = {
  name: 'own', title: 'My chain', currency: 'EUR', labour_price: 0, visit_price: 0,
  parts: [
    { kind: 'aerial', id: 'own-aerial', name: 'My aerial', gain_dbd: [[470, 6], [694, 10]], beamwidth_deg: 50, front_to_back_db: 18, price: 22 },
    { kind: 'feeder', id: 'own-feeder', name: 'Feeder', ...NEW_PARTS.feeder },
    { kind: 'outlet', id: 'own-outlet', name: 'Outlet', ...NEW_PARTS.outlet },
    { kind: 'receiver', id: 'own-set', name: 'Set', price: 0 },
  ],
};

const amplifier = [
  { key: 'gain_db', label: 'Gain', unit: 'dB' },
  { key: 'noise_figure_db', label: 'Noise figure', unit: 'dB' },
  { key: 'rated_output_dbuv', label: 'Rated output', unit: 'dB(µV)' },
];
const cable = [{ key: 'cable', label: 'Cable' }, { key: 'length_m', label: 'Length', unit: 'm' }];
const loss = [{ key: 'loss_db', label: 'Loss', unit: 'dB' }];
const supply = [{ key: 'draws_ma', label: 'Draws', unit: 'mA; empty: own supply' }];

/**
 * A field of a part: a figure, unless it has choices or is a table of pairs with a MHz each.
 * @typedef {{key: string, label: string, unit?: string, whole?: boolean, choices?: string[][], table?: string}} PartField
 */
/** @type {Record<string, PartField[]>} */
const FIELDS = {
  aerial: [
    { key: 'gain_dbd', label: 'Gain', unit: 'MHz: dBd, that is dBi less 2.15', table: '470: 6; 694: 10' },
    { key: 'beamwidth_deg', label: 'Beamwidth', unit: '°' },
    { key: 'front_to_back_db', label: 'Front to back', unit: 'dB' },
    { key: 'place', label: 'Where', choices: [['roof', 'on the roof'], ['loft', 'in the loft'], ['room', 'in a room']] },
  ],
  'masthead-amplifier': [...amplifier, ...supply],
  'launch-amplifier': amplifier,
  feeder: cable,
  'fly-lead': cable,
  filter: [{ key: 'loss_db', label: 'Loss', unit: 'MHz: dB', table: '694: 1; 703: 15' }],
  attenuator: loss,
  combiner: loss,
  switch: loss,
  outlet: loss,
  equaliser: [{ key: 'slope_db', label: 'Slope', unit: 'dB' }],
  'power-inserter': [{ key: 'supply_v', label: 'Supply', unit: 'V' }, { key: 'most_ma', label: 'At most', unit: 'mA' }],
  splitter: [{ key: 'ports', label: 'Ways', whole: true }],
  tap: [{ key: 'tap_loss_db', label: 'Tapped', unit: 'dB' }, { key: 'through_loss_db', label: 'Through', unit: 'dB' }, { key: 'ports', label: 'Ports', whole: true }],
  mast: [{ key: 'diameter_mm', label: 'Diameter', unit: 'mm' }, { key: 'wall_mm', label: 'Wall', unit: 'mm' }, { key: 'free_m', label: 'Free', unit: 'm above the upper clamp' }, { key: 'clamped_m', label: 'Clamped', unit: 'm' }],
  receiver: [{ key: 'noise_figure_db', label: 'Noise figure', unit: 'dB; empty: as planned for' }],
};

/** Every aerial of a mast has its area in the wind; a second one is turned by itself. */
const WIND = { key: 'wind_area_m2', label: 'Wind area', unit: 'm²' };
const TURNED = { key: 'pointing_deg', label: 'Turned to', unit: '° true; empty: the best' };
const MISMATCH = { key: 'gain_includes_mismatch', label: 'Its gain', choices: [['true', 'as measured or sold'], ['false', 'is without the mismatch']] };

/**
 * What can be typed of a part: of an aerial it depends on what else there is.
 * @param {any} part @param {any} [chain] @returns {PartField[]}
 */
export function fieldsOf(part, chain = { parts: [part] }) {
  const usual = FIELDS[part.kind] ?? [];
  if (part.kind !== 'aerial') return usual;
  const first = chain.parts.find((one) => one.kind === 'aerial');
  return [
    ...usual.filter(({ key }) => part.pattern !== 'measured' || !['beamwidth_deg', 'front_to_back_db'].includes(key)),
    ...(first.id === part.id ? [] : [TURNED]),
    ...(part.reflection?.length ? [MISMATCH] : []),
    ...(chain.parts.some((one) => one.kind === 'mast') ? [WIND] : []),
  ];
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
