/** A hand-written answer in the shape of the document: three multiplexes, one mast of two rods. */

const cell = (chance, grade, emission) => ({ chance, grade, emission, pointing_deg: 118, held_back_by: { limit: 'noise' } });

export function sampleAnswer() {
  return {
    roof: { latitude_deg: 44.4, longitude_deg: -37.4, aerial_agl_m: 10, ground_amsl_m: 143 },
    multiplexes: [
      { id: 'a', name: 'Alpha', chains: { loft: cell(0.97, 'secure', 'near-a'), long: cell(0.99, 'secure', 'near-a') } },
      { id: 'b', name: 'Beta', chains: { loft: cell(0.5, 'open', 'near-b'), long: cell(0.8, 'likely', 'near-b') } },
      { id: 'c', name: 'Gamma', chains: { loft: cell(0.1, 'doubtful', 'far-c'), long: cell(0.75, 'likely', 'far-c') } },
    ],
    emissions: [
      { id: 'near-a', transmitter: 'near', chains: { loft: { chance: 0.97 }, long: { chance: 0.99 } } },
      { id: 'near-b', transmitter: 'near', chains: { loft: { chance: 0.5 }, long: { chance: 0.8 } } },
      { id: 'far-c', transmitter: 'far', chains: { loft: { chance: 0.1 }, long: { chance: 0.75 } } },
    ],
    chains: {
      loft: { title: 'Loft dipole', currency: 'EUR', expected_count: 1.57 },
      long: { title: 'Long aerial', currency: 'EUR', expected_count: 2.54 },
    },
    verdicts: [sampleVerdict()],
    assumptions: [{ id: 'worth_per_multiplex', value: 50 }],
    cautions: [],
  };
}

export function sampleVerdict(change = {}) {
  return {
    baseline: 'loft', candidate: 'long', answer: 'worth it', expected_extra: 2.08, price_difference: 90,
    break_even_price: 104, cheapest_equal: null, reason: '', ...change,
  };
}
