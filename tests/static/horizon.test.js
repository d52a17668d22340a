import assert from 'node:assert/strict';
import test from 'node:test';
import { chancesAt, curtain, gradeOf, places, strip } from '../../static/scripts/horizon.js';

const box = { left: 0, right: 360, top: 0, bottom: 100 };
const skyline = (change = {}) => ({
  bearing_deg: [0, 90, 180, 270], angle_deg: [0, 2, 0, 0],
  transmitters: [
    { name: 'near', bearing_deg: 200, stands: 'above', antenna_deg: 1, horizon_deg: 0 },
    { name: 'far', bearing_deg: 90, stands: 'behind', antenna_deg: 0.5, horizon_deg: 2 },
    { name: 'nowhere', bearing_deg: 10, stands: null },
  ], ...change,
});

test('bearings run from left to right, higher ground stands higher', () => {
  const { x, y } = strip(skyline(), box);
  assert.equal(x(90), 90);
  assert.ok(y(2) < y(0));
});

test('a mast above the horizon rises from it, one behind hangs below it', () => {
  const [near, far] = strip(skyline(), box).masts;
  assert.ok(near.tip < near.foot);
  assert.ok(far.tip > far.foot);
  assert.equal(strip(skyline(), box).masts.length, 2);
});

test('a gap in the ground is a gap in the line', () => {
  const shapes = strip(skyline({ bearing_deg: [0, 60, 120, 180, 240, 300], angle_deg: [0, 1, null, 0, 1, 0] }), box);
  assert.equal(shapes.line.match(/M/g).length, 2);
});

test('the curtain is open on the axis and down where nothing is heard', () => {
  const loss = Array.from({ length: 360 }, (_, degree) => Math.min(30, Math.abs(((degree + 180) % 360) - 180)));
  const drop = Object.fromEntries(curtain(loss, box).slice(1).split(/[LMZ]/).filter(Boolean).map((pair) => pair.split(' ').map(Number)));
  assert.equal(drop[0], 0);
  assert.equal(drop[180], 100);
  assert.equal(drop[10], drop[350]);
});

test('names find rows of their own, or none', () => {
  const found = places([{ x: 50, width: 40 }, { x: 60, width: 40 }, { x: 70, width: 40 }], 2, 0, 360);
  assert.deepEqual(found.map((one) => one?.row), [0, 1, undefined]);
  assert.equal(places([{ x: 2, width: 40 }], 1, 0, 360)[0].x, 20);
});

test('turned to the best direction the chances are the answer’s own, else those that were swept', () => {
  const percent = Array.from({ length: 360 }, (_, degree) => (degree === 90 ? 70 : 10));
  const answer = {
    multiplexes: [{ id: 'a', name: 'A', chains: { long: { chance: 0.83 } } }, { id: 'b', name: 'B', chains: { long: { chance: 0.001 } } }],
    chains: { long: { pointings: [{ pointing_deg: 118, chance_percent_by_degree: { a: percent } }] } },
  };
  assert.deepEqual(chancesAt(answer, 'long', 118).map((one) => one.chance), [0.83, 0.001]);
  assert.deepEqual(chancesAt(answer, 'long', 450).map((one) => one.chance), [0.7, 0]);
});

test('grades change at the location classes of GE06 planning, 0.95 and 0.70, and at 0.30', () => {
  assert.deepEqual([0.95, 0.949, 0.7, 0.699, 0.3, 0.299].map(gradeOf), ['secure', 'likely', 'likely', 'open', 'open', 'doubtful']);
});
