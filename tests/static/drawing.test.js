import assert from 'node:assert/strict';
import test from 'node:test';
import { drawing, pointAt, steps } from '../../static/scripts/drawing.js';

const BOX = { left: 0, right: 100, top: 0, bottom: 100 };
const flat = (ground, radius = 5) => ({
  distance_km: [0, 5, 10],
  ground_amsl_m: ground,
  bulge_m: [0, 0, 0],
  line_amsl_m: [50, 50, 50],
  first_fresnel_m: [0, radius, 0],
  water: [false, false, false],
});

test('the roof stands on the left and the mast on the right', () => {
  const { x } = drawing(flat([0, 0, 0]), BOX);
  assert.equal(x(10), 0);
  assert.equal(x(0), 100);
});

test('where the ground stays under the zone nothing is filled', () => {
  assert.equal(drawing(flat([0, 44, 0]), BOX).taken, '');
});

test('only what the ground takes of the zone is filled', () => {
  const outline = { ...flat([0, 48, 0]), distance_km: [0, 4, 5, 6, 10], ground_amsl_m: [0, 48, 48, 48, 0], bulge_m: [0, 0, 0, 0, 0], line_amsl_m: [50, 50, 50, 50, 50], first_fresnel_m: [0, 5, 5, 5, 0], water: [false, false, false, false, false] };
  const { taken, y } = drawing(outline, BOX);
  const heights = [...taken.matchAll(/[ML][\d.]+ ([\d.]+)/g)].map((match) => Number(match[1]));
  assert.equal(Math.min(...heights).toFixed(1), y(48).toFixed(1));
  assert.equal(Math.max(...heights).toFixed(1), y(45).toFixed(1));
});

test('a ridge through the whole zone fills it to its upper edge and no farther', () => {
  const outline = { ...flat([0, 90, 0]), distance_km: [0, 4, 6, 10], ground_amsl_m: [0, 90, 90, 0], bulge_m: [0, 0, 0, 0], line_amsl_m: [50, 50, 50, 50], first_fresnel_m: [0, 5, 5, 0], water: [false, false, false, false] };
  const { taken, y } = drawing(outline, BOX);
  const heights = [...taken.matchAll(/[ML][\d.]+ ([\d.]+)/g)].map((match) => Number(match[1]));
  assert.equal(Math.min(...heights).toFixed(1), y(55).toFixed(1));
});

test('the Earth’s bulge lifts the ground', () => {
  const outline = { ...flat([0, 10, 0]), bulge_m: [0, 7, 0] };
  assert.equal(pointAt(outline, 4.9).top, 17);
});

test('axis steps are round and inside', () => {
  assert.deepEqual(steps(0, 52, 7), [0, 10, 20, 30, 40, 50]);
  assert.deepEqual(steps(-3, 4, 4), [-2, 0, 2, 4]);
  assert.deepEqual(steps(5, 5, 4), [5]);
});
